#pragma once
/// \file The pace of one grid point: from the pieces of a plan to s as a function of t.

#include <optional>
#include <span>
#include <vector>

#include "lang/support/result.h"
#include "runtime/equation/propagate.h"
#include "runtime/equation/timeline.h"
#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// Values of s closer than this are one.
inline constexpr double kSameS = 1e-12;

/// A moment of a run: laboratory time t [ns] and the s that holds from there on.
struct Instant {
  double t = 0;
  double s = 0;
};

/// The timeline of `pieces`, with `settings` the values of set kSettings.
/// A ramp over no time is a step; a hold for no time is nothing.
/// Errors, with the place of the number: `not_finite`, `negative_time`, `s_out_of_range` (s outside
/// [0, 1]), and for a followed waveform `pace_not_ascending` (t must start at 0 and rise).
Result<Timeline, RunError> work_out_pace(const std::vector<PacePiece>& pieces,
                                         std::span<const double> settings);

/// s at t; at a sudden step the value after it. t is held in [0, duration].
double s_at(const Timeline& timeline, double t);

/// When s is first (or last) exactly `s`; a sudden step over `s` does not meet it, an end of a
/// segment within 1e-12 does. None if never.
std::optional<Instant> instant_of_s(const Timeline& timeline, double s, bool last);

/// `count` >= 2 instants even in t with both ends; one instant if nothing lasts.
std::vector<Instant> even_instants(const Timeline& timeline, std::size_t count);

/// Lowest and highest s that the timeline visits.
struct RangeOfS {
  double lowest = 0, highest = 0;
};
RangeOfS range_of_s(const Timeline& timeline);

/// Times, ascending and without repeats, at which s equals one of `positions` inside a segment that
/// moves; the ends of segments are left out (they are boundaries already).
std::vector<double> times_of_positions(const Timeline& timeline, std::span<const double> positions);

}  // namespace tarn::runtime
