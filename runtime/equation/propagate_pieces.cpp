#include "runtime/equation/propagate_pieces.h"

#include <algorithm>
#include <cmath>

namespace tarn::runtime {

namespace {

Piece make_piece(const Segment& segment, double t0, double t1, bool still) {
  const double change = segment.s1 - segment.s0;
  Piece piece{t0, t1, still, segment, change / (segment.t1 - segment.t0), segment.s0, segment.s0};
  if (change == 0) return piece;
  const auto at = [&](double t) { return segment.s0 + piece.slope * (t - segment.t0); };
  const double margin = std::min(std::abs(change) * 0x1p-42, std::abs(piece.slope) * (t1 - t0) / 4);
  piece.low = std::min(at(t0), at(t1)) + margin;
  piece.high = std::max(piece.low, std::max(at(t0), at(t1)) - margin);
  return piece;
}

}  // namespace

std::vector<Piece> cut_pieces(const Timeline& timeline, std::span<const double> breaks, bool reads_t) {
  std::vector<Piece> pieces;
  for (const Segment& segment : timeline.segments) {
    const bool still = !reads_t && segment.s0 == segment.s1;
    double from = segment.t0;
    const auto cut_at = [&](double to) {
      pieces.push_back(make_piece(segment, from, to, still));
      from = to;
    };
    // A cut this close to an end is the end, worked out with other rounding.
    const double margin = 1e-13 * std::max(segment.t1, segment.t1 - segment.t0);
    if (!still)
      for (const double t : breaks)
        if (t > from + margin && t < segment.t1 - margin) cut_at(t);
    cut_at(segment.t1);
  }
  return pieces;
}

std::vector<Leg> group_legs(const std::vector<Piece>& pieces) {
  std::vector<Leg> legs;
  Leg leg;
  for (std::size_t i = 0; i < pieces.size(); ++i) {
    leg.then_hold = pieces[i].still;
    if (leg.then_hold) {
      legs.push_back(leg);
      leg = {i + 1, 0, false};
    } else {
      ++leg.count;
    }
  }
  if (leg.count > 0) legs.push_back(leg);
  return legs;
}

}  // namespace tarn::runtime
