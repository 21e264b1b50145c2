#pragma once
/// \file How far an answer may be off: two propagations at different tolerances are compared.
///
/// The error of a propagation follows its tolerance, so that a run at tau and one at tau/10 differ
/// by about the error of the first, nine times that of the second. Reported is the tighter run. An
/// answer can agree by chance where the states do not: a part of the distance of the states, as
/// seen by a few Pauli words, times what it can do to the answer, is a floor.

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

/// The answer of row `row`, read off `fine`, and the estimate of its error. `norms` are those of
/// the readings, `used` the readings the row uses.
Answer estimate_answer(const Snapshot& coarse, const Snapshot& fine, const ObservableRows& rows, std::uint32_t row,
                       std::span<const std::uint32_t> used, std::span<const double> norms);

/// Likewise for one probability of the distribution.
Answer estimate_probability(double coarse, double fine, double distance);

/// Answer from one run whose readings are known to `error` times their norms.
Answer answer_with_error(const Snapshot& run, double error, const ObservableRows& rows, std::uint32_t row,
                         std::span<const std::uint32_t> used, std::span<const double> norms);

/// lowest, highest or final of a series; the error is how far the errors can move it.
Answer reduce_series(Over over, std::span<const Sample> series);

}  // namespace tarn::runtime
