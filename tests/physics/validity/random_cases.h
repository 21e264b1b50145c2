#pragma once
/// \file Random chips of one and two qubits in random baths, run under every equation and under the hierarchy.
/// All numbers are invented.

#include <limits>
#include <optional>
#include <string>
#include <vector>

#include "runtime/bath/thermal_bath.h"
#include "runtime/equation/propagate.h"
#include "runtime/equation/timeline.h"
#include "runtime/levels/family.h"
#include "runtime/plan/plan.h"
#include "runtime/validity/along.h"

namespace tarn::runtime::testing {

/// A chip that stands or is ramped from s = 0 to 1.
struct RandomCase {
  unsigned seed = 0;
  HamiltonianFamily family;
  std::vector<ThermalBath> baths;  ///< One for every coupling.
  Timeline timeline;               ///< Without segments: its stationary state is asked for.
  Density initial;
  std::vector<double> times;       ///< Where populations are compared; none for a stationary state.
  double run_length = 0;           ///< As tau_B takes it.
  std::string text;
};

RandomCase random_case(unsigned seed);

/// States at the times, or the stationary one, in the computational basis. Empty where the equation gives none.
std::optional<std::vector<Density>> answers(const RandomCase& one, Equation equation, double window_factor = 1);

/// Likewise by the hierarchy, deepened until no element moves by more than `accuracy`. Empty where that takes longer than
/// `seconds`, or more matrices than some thousand.
std::optional<std::vector<Density>> exact_answers(const RandomCase& one, double accuracy, double seconds);

/// The largest difference of a population, in the computational basis and in that of the levels.
double largest_difference(const RandomCase& one, const std::vector<Density>& a, const std::vector<Density>& b);

/// What the judge is told along the run: `count` places, or the one of a chip that stands.
std::vector<ValidityInput> inputs_along(const RandomCase& one, Equation equation, std::size_t count);

/// One equation on one case.
struct CaseVerdict {
  Equation equation = Equation::none;
  double error = 0;             ///< Of populations, against the hierarchy; infinity where there is no answer.
  RunValidity validity;
  std::vector<double> ratios;   ///< The largest of each condition along the run.
};

/// Redfield, Davies, coarse-grained, universal. Empty without an exact answer.
std::optional<std::vector<CaseVerdict>> judged_case(const RandomCase& one, double accuracy, double seconds);

}  // namespace tarn::runtime::testing
