#pragma once
/// \file A pace worked out for one grid point: when s has which value.

#include <cstddef>
#include <vector>

namespace tarn::runtime {

/// s runs linearly from s0 to s1 while t [ns] runs from t0 to t1 (t0 < t1). A hold has s0 == s1.
struct Segment {
  double t0 = 0, t1 = 0, s0 = 0, s1 = 0;
};

/// Segments follow each other in t without a hole, from t = 0; between two of them s may jump
/// (a sudden step: the state stays as it is). No segments: static at `first_s`.
struct Timeline {
  std::vector<Segment> segments;
  double first_s = 0;
  double last_s = 0;
  double duration() const { return segments.empty() ? 0.0 : segments.back().t1; }
};

}  // namespace tarn::runtime
