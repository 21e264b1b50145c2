#pragma once
/// \file Where in the user's text something stands, for messages made at run time.

#include <cstdint>
#include <string>

namespace tarn {

/// Lines and columns count from 1; `column_end` is the last column marked. An empty file means "no place".
struct Place {
  std::string file;
  std::uint32_t line = 0;
  std::uint32_t column = 0;
  std::uint32_t column_end = 0;
  bool operator==(const Place&) const = default;
};

}  // namespace tarn
