#include "lang/source/utf8.h"

#include <algorithm>
#include <array>

namespace tarn {
namespace {

struct Block {
  std::uint32_t first, last;
};

// Blocks of the Unicode standard, chapter and annex 11 (East Asian width), coarse.
constexpr std::array<Block, 9> kWide{{{0x1100, 0x115F}, {0x2E80, 0xA4CF}, {0xAC00, 0xD7A3}, {0xF900, 0xFAFF},
                                      {0xFE30, 0xFE6F}, {0xFF00, 0xFF60}, {0xFFE0, 0xFFE6}, {0x1F300, 0x1FAFF},
                                      {0x20000, 0x3FFFD}}};
constexpr std::array<Block, 4> kZero{{{0x300, 0x36F}, {0x200B, 0x200F}, {0x20D0, 0x20FF}, {0xFE00, 0xFE0F}}};

template <std::size_t N>
bool contains(const std::array<Block, N>& blocks, std::uint32_t c) {
  return std::any_of(blocks.begin(), blocks.end(), [&](const Block& b) { return c >= b.first && c <= b.last; });
}

}  // namespace

Decoded decode_utf8(std::string_view text) {
  const auto byte_at = [&](std::size_t i) { return static_cast<unsigned>(static_cast<unsigned char>(text[i])); };
  const unsigned lead = byte_at(0);
  if (lead < 0x80) return {lead, 1};
  const std::size_t length = lead >= 0xF0 ? 4 : lead >= 0xE0 ? 3 : 2;
  if (lead < 0xC2 || lead > 0xF4 || text.size() < length) return {};
  std::uint32_t code_point = lead & (0xFFU >> (length + 1));
  for (std::size_t i = 1; i < length; ++i) {
    const unsigned next = byte_at(i);
    if ((next & 0xC0U) != 0x80U) return {};
    code_point = (code_point << 6U) | (next & 0x3FU);
  }
  constexpr std::array<std::uint32_t, 5> kSmallest{0, 0, 0x80, 0x800, 0x10000};
  const bool surrogate = code_point >= 0xD800 && code_point <= 0xDFFF;
  if (code_point < kSmallest[length] || code_point > 0x10FFFF || surrogate) return {};
  return {code_point, length};
}

unsigned terminal_width(std::uint32_t code_point) {
  if (contains(kZero, code_point)) return 0;
  return contains(kWide, code_point) ? 2 : 1;
}

}  // namespace tarn
