#include "lang/syntax/characters.h"

#include <array>
#include <utility>

#include "lang/source/utf8.h"

namespace tarn {
namespace {

bool is_letter(std::uint32_t c) {
  const bool latin = (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || c == '_';
  const bool greek = c == 0x386 || (c >= 0x388 && c <= 0x3FF);
  constexpr std::uint32_t kMicroSign = 0xB5;
  return latin || greek || c == kMicroSign;
}

}  // namespace

std::size_t letter_length(std::string_view text) {
  const Decoded first = decode_utf8(text);
  return is_letter(first.code_point) ? first.length : 0;
}

std::size_t character_length(std::string_view text) {
  const std::size_t length = decode_utf8(text).length;
  return length == 0 ? 1 : length;
}

std::size_t first_bad_character(std::string_view text) {
  std::size_t at = 0;
  while (at < text.size()) {
    const Decoded next = decode_utf8(text.substr(at));
    if (next.length == 0 || text[at] == '\0') return at;
    at += next.length;
  }
  return at;
}

std::string_view plain_spelling(std::string_view character) {
  constexpr std::array<std::pair<std::string_view, std::string_view>, 17> kLookAlikes{{
      {"\xE2\x88\x92", "-"}, {"\xE2\x80\x93", "-"}, {"\xE2\x80\x94", "--"}, {"\xC3\x97", "*"}, {"\xC2\xB7", "*"},
      {"\xC3\xB7", "/"}, {"\xE2\x89\xA4", "<="}, {"\xE2\x89\xA5", ">="}, {"\xE2\x89\xA0", "!="}, {"\xC2\xB2", "^2"},
      {"\xC2\xB3", "^3"}, {"\xE2\x80\x9C", "\""}, {"\xE2\x80\x9D", "\""}, {"\xE2\x80\xA6", ".."}, {"\xC2\xA0", "a plain space"},
      {"'", "\""}, {";", "nothing: a statement ends where the next begins"},
  }};
  for (const auto& [look_alike, plain] : kLookAlikes) {
    if (character == look_alike) return plain;
  }
  return {};
}

}  // namespace tarn
