#pragma once
/// \file One run under a fast-noise equation: d rho/dt = L(s(t), t) rho along a timeline.
///
/// Pieces that move are integrated by the explicit pair 8(5,3); pieces in which nothing changes by one
/// exponential of the whole map where that is cheaper. Sudden steps leave the state as it is.

#include <span>

#include "lang/support/result.h"
#include "runtime/equation/propagate.h"
#include "runtime/equation/timeline.h"
#include "runtime/generator/open_generator.h"

namespace tarn::runtime {

struct OpenRun {
  const Timeline* timeline = nullptr;
  std::span<const double> breaks;  ///< Where some schedule has a kink [ns], ascending.
  std::span<const double> times;   ///< Where the state is asked for [ns], ascending, within the timeline.
  double tolerance = 1e-8;         ///< The error of rho at the end, in the Frobenius norm, is a few times this at most.
  bool reads_t = false;            ///< A coefficient depends on t itself: no piece is still.
};

/// Calls `visit` with a Density at every requested time. Trace and Hermiticity hold to rounding. Errors:
/// not_finite, step_underflow, interrupted.
Result<Counters, RunError> propagate_open(OpenGenerator& generator, const OpenRun& run, const Density& initial,
                                          const Visit& visit, const Interrupted& interrupted);

}  // namespace tarn::runtime
