#pragma once
/// \file How far an answer may be off: it is held against less accurate runs of the same point.
///
/// Where the error of a propagation follows its tolerance, a run at tau and one at tau/10 differ
/// by about the error of the first, nine times that of the second; Davies' refinement says itself what to
/// compare with. Reported is the best run. An answer can agree by chance where the states do not: a part of the
/// distance of the states, as seen by a few Pauli words, times what it can do to the answer, is a floor.

#include <functional>
#include <span>
#include <vector>

#include "runtime/experiment/outcome.h"
#include "runtime/experiment/readings.h"

namespace tarn::runtime {

/// The second run's tolerance is the first's times this.
inline constexpr double kTighter = 0.1;
/// Tolerances beyond this ask for more digits than a double has.
inline constexpr double kTightestTolerance = 1e-14;

/// What one propagation gave at one observation.
struct Snapshot {
  std::vector<Measured> readings;    ///< One for each reading of the plan.
  std::vector<double> probes;
  std::vector<double> distribution;  ///< If asked there.
};

/// Values of all observables' rows for given readings at one instant.
using ObservableRows = std::function<std::vector<double>(std::span<const double> readings)>;

/// Root mean square of the differences of the probes.
double state_distance(const Snapshot& coarse, const Snapshot& fine);

/// The error of an answer over its difference from a less accurate one, and over the distance of the states
/// times what it can do.
struct Weights {
  double of_difference = 1;
  double of_distance = 0;
};

/// Of a run at kTighter times the tolerance of the other, for kets and for density matrices, whose phases err most while
/// they last. Measured over 500 random chips each (tests/unit/runtime/experiment/accuracy_test.cpp,
/// tests/program/error_coverage_test.cpp): the error reported covers the difference to a run 100 times tighter in at
/// least 95 % of them.
inline constexpr Weights kOfLooserKet{0.8, 0.025};
inline constexpr Weights kOfLooserDensity{0.8, 0.0025};

struct Comparison {
  const Snapshot& run;
  Weights weights;
};

/// The answer of row `row`, read off `best`, and the estimate of its error: the largest that a comparison
/// tells, `shared` (an error of the state that all runs have in common) times what it can do, rounding, and the
/// errors of the readings themselves. `norms` are those of the readings, `used` the readings the row uses.
Answer estimate_answer(const Snapshot& best, std::span<const Comparison> others, double shared,
                       const ObservableRows& rows, std::uint32_t row, std::span<const std::uint32_t> used,
                       std::span<const double> norms);

/// Likewise for entry b of the distribution.
Answer estimate_probability(const Snapshot& best, std::span<const Comparison> others, double shared, std::size_t b);

/// lowest, highest or final of a series; the error is how far the errors can move it.
Answer reduce_series(Over over, std::span<const Sample> series);

}  // namespace tarn::runtime
