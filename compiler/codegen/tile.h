#pragma once
/// \file The part of the output that one turn of a sweep computes in registers.
///
/// A tile is a set of vectors that holds with each position p also p ^ d for every d of its span. A
/// flip inside the span is another register of the tile. Of a flip outside only the rest matters:
/// flips with one rest read the same vectors, and vectors that see the same pair share its sum. So a
/// span with two far bits joined (d = a ^ b) adds less for flips of a and b. It also scatters what is
/// read, which costs more than it saves once the state outgrows the first-level cache.

#include <cstdint>
#include <vector>

namespace tarn::compiler {

/// A vector of a tile, seen from the tile's base: base ^ rest, vector number `vector`.
struct Place {
  std::uint64_t rest = 0;  ///< Amplitude index, with no bit that tells vectors of a tile apart.
  std::uint64_t vector = 0;
  bool operator==(const Place&) const = default;
  auto operator<=>(const Place&) const = default;
};

/// 2^(near + joined) vectors of 2^lane_bits amplitudes each. Vector v stands at base ^ offset(v):
/// its lower `near` bits count neighbours, its upper ones the joined pairs of far bits.
class Tile {
 public:
  /// `near` neighbours' bits and `joined` pairs of far bits; lane_bits + near + 2 joined <= bits.
  Tile(std::uint32_t bits, std::uint32_t lane_bits, std::uint32_t near, std::uint32_t joined);

  std::uint64_t vectors() const { return std::uint64_t{1} << (near_ + joined_.size()); }
  /// Bases are 0, 1, 2 ... times 2^base_shift(); this many of them.
  std::uint64_t bases() const;
  std::uint32_t base_shift() const { return lane_bits_ + near_; }

  /// Vector v's neighbours' part, to be added, and its far part, to be flipped [amplitudes].
  std::uint64_t near_offset(std::uint64_t v) const;
  std::uint64_t far_offset(std::uint64_t v) const;

  /// Where vector v is found after a flip; bits within a vector are not looked at.
  Place flipped(std::uint64_t mask, std::uint64_t v) const;

 private:
  std::uint32_t bits_, lane_bits_, near_;
  std::vector<std::uint64_t> joined_;  ///< The k-th holds top bit k and its partner.
};

/// The tile for vectors of 2^lane_bits amplitudes: 2^register_bits vectors, fewer for small systems
/// or very many flips. Tiles without joined pairs are contiguous and go upwards.
Tile choose_tile(std::uint32_t bits, std::uint32_t lane_bits, std::uint32_t register_bits, std::uint64_t flips, bool may_join);

}  // namespace tarn::compiler
