#include "compiler/codegen/tile.h"

#include <algorithm>

#include "lang/support/check.h"

namespace tarn::compiler {
namespace {

constexpr std::uint64_t kMostVectorOps = 4096;  ///< Of one tile's code; beyond it tiles shrink.
constexpr std::uint32_t kPairsUpTo = 10;  ///< Bits up to which a state fits the first-level cache.

}  // namespace

Tile::Tile(std::uint32_t bits, std::uint32_t lane_bits, std::uint32_t near, std::uint32_t joined)
    : bits_(bits), lane_bits_(lane_bits), near_(near) {
  TARN_CHECK(lane_bits + near + 2 * joined <= bits);
  for (std::uint32_t k = 0; k < joined; ++k) {
    const std::uint32_t top = bits - 1 - k;
    joined_.push_back(std::uint64_t{1} << top | std::uint64_t{1} << (top - joined));
  }
}

std::uint64_t Tile::bases() const {
  return std::uint64_t{1} << (bits_ - base_shift() - static_cast<std::uint32_t>(joined_.size()));
}

std::uint64_t Tile::near_offset(std::uint64_t v) const {
  return (v & ((std::uint64_t{1} << near_) - 1)) << lane_bits_;
}

std::uint64_t Tile::far_offset(std::uint64_t v) const {
  std::uint64_t offset = 0;
  for (std::size_t k = 0; k < joined_.size(); ++k)
    if ((v >> (near_ + k) & 1) != 0) offset ^= joined_[k];
  return offset;
}

Place Tile::flipped(std::uint64_t mask, std::uint64_t v) const {
  for (std::size_t k = 0; k < joined_.size(); ++k) {
    const std::uint64_t top = std::uint64_t{1} << (bits_ - 1 - k);
    if ((mask & top) == 0) continue;
    mask ^= joined_[k];
    v ^= std::uint64_t{1} << (near_ + k);
  }
  v ^= mask >> lane_bits_ & ((std::uint64_t{1} << near_) - 1);
  return {mask >> base_shift() << base_shift(), v};
}

Tile choose_tile(std::uint32_t bits, std::uint32_t lane_bits, std::uint32_t register_bits, std::uint64_t flips, bool may_join) {
  std::uint32_t size = std::min(register_bits, bits - lane_bits);
  while (size > 0 && (flips << size) > kMostVectorOps) --size;
  const bool scattered = may_join && bits <= kPairsUpTo && size >= 3 && bits >= lane_bits + size + 2;
  const std::uint32_t joined = scattered ? 2 : 0;
  return Tile(bits, lane_bits, size - joined, joined);
}

}  // namespace tarn::compiler
