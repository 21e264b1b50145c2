#pragma once
/// \file Characters of a UTF-8 text: which are letters, which may not stand in a text.

#include <cstddef>
#include <cstdint>
#include <string_view>

namespace tarn {

constexpr bool is_digit(char c) { return c >= '0' && c <= '9'; }

/// Bytes of the letter (Latin, Greek, micro sign) or underscore that `text` starts
/// with; 0 if it starts otherwise. Precondition: valid UTF-8.
std::size_t letter_length(std::string_view text);

/// Bytes of the character `text` starts with. Precondition: valid UTF-8, not empty.
std::size_t character_length(std::string_view text);

/// Offset of the first byte that is NUL or no part of valid UTF-8 (RFC 3629); the
/// text's size if there is none.
std::size_t first_bad_character(std::string_view text);

/// The ASCII spelling meant by a look-alike such as a typographic minus; empty if none.
std::string_view plain_spelling(std::string_view character);

}  // namespace tarn
