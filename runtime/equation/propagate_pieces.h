#pragma once
/// \file A timeline cut where the coefficients of an equation may not be smooth.

#include <algorithm>
#include <cstddef>
#include <span>
#include <vector>

#include "runtime/equation/timeline.h"

namespace tarn::runtime {

/// A stretch of time inside one segment, free of breaks.
struct Piece {
  double t0 = 0, t1 = 0;
  bool still = false;       ///< No coefficient changes.
  Segment segment;          ///< The whole segment: s is interpolated in it.
  double slope = 0;         ///< ds/dt [1/ns].
  double low = 0, high = 0; ///< Bounds of s_at().

  /// s at t, kept strictly between the values at the ends, so that a schedule that jumps or bends
  /// there is seen from inside (the shift is 2^-42 of the segment's change of s).
  double s_at(double t) const {
    return std::min(std::max(segment.s0 + slope * (t - segment.t0), low), high);
  }
};

/// Pieces that are integrated in one go, then at most one still piece.
struct Leg {
  std::size_t first = 0, count = 0;  ///< Moving pieces; count may be 0.
  bool then_hold = false;            ///< Piece first + count is still.
};

/// Cuts every segment at `breaks` [ns, ascending]. `reads_t`: some coefficient depends on t itself,
/// so that no piece is still.
std::vector<Piece> cut_pieces(const Timeline& timeline, std::span<const double> breaks, bool reads_t);

std::vector<Leg> group_legs(const std::vector<Piece>& pieces);

}  // namespace tarn::runtime
