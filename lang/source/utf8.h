#pragma once
/// \file Reading UTF-8 (RFC 3629) one character at a time.

#include <cstddef>
#include <cstdint>
#include <string_view>

namespace tarn {

struct Decoded {
  std::uint32_t code_point = 0;
  std::size_t length = 0;  ///< Bytes; 0 where the text does not start with a valid character.
};

/// The character that `text` starts with. Precondition: not empty.
Decoded decode_utf8(std::string_view text);

/// Columns a terminal gives the character: 0 for combining marks, 2 for wide East
/// Asian characters and pictographs, else 1.
unsigned terminal_width(std::uint32_t code_point);

}  // namespace tarn
