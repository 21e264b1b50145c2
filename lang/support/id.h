#pragma once
/// \file A typed row of a table: ids of different tables do not mix.

#include <compare>
#include <cstdint>

namespace tarn {

/// Row of the table that Tag stands for.
template <class Tag>
struct Id {
  std::uint32_t row = 0;
  bool operator==(const Id&) const = default;
  auto operator<=>(const Id&) const = default;
};

}  // namespace tarn
