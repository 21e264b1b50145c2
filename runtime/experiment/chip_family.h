#pragma once
/// \file The chip of one grid point as operators along s, for everything that works in its levels.

#include <memory>
#include <span>
#include <vector>

#include "runtime/experiment/point.h"
#include "runtime/generator/open_generator.h"
#include "runtime/levels/family.h"

namespace tarn::runtime {

/// The noise operators with independent baths: couplings as written, or combined by the eigenvectors of their
/// correlations: sqrt(l_k) sum_a V_ak A_a for eigenvalue l_k.
struct NoiseOperators {
  std::vector<OperatorSum> ops;
  std::vector<std::uint32_t> bath;  ///< Row of the plan's baths, of each.
};

/// Error: `bad_correlation` (not symmetric, not 1 on the diagonal, a negative eigenvalue), with the place.
Result<NoiseOperators, RunError> independent_noise(const Plan& plan, std::span<const double> settings);

/// The functions of a task's point, to keep and to share between threads.
std::shared_ptr<const Functions> functions_of(const PointTask& task);

/// H without terms in t, and the noise operators. `kinks` are values of s, ascending.
HamiltonianFamily family_of(const PlanModel& model, std::shared_ptr<const Functions> functions,
                            const NoiseOperators& noise, std::span<const double> kinks);

/// H with its terms in t, and the jumps as written.
LabOperators lab_operators(const PlanModel& model, std::shared_ptr<const Functions> functions);

/// What points must share, bit by bit, to share levels along s: the inputs that the Hamiltonian and the noise
/// operators read.
std::vector<double> levels_key(const Plan& plan, const Functions& functions, std::span<const double> settings);

/// True if every coefficient that levels read is finite at the places where it is looked at first.
bool finite_levels(const Plan& plan, const Functions& functions);

/// The range of s that levels are followed over for a timeline: its own, widened where it is very narrow.
RangeOfS followed_range(const Timeline& timeline);

/// Values of s, even over [0, 1], at which coefficients are compared.
std::vector<double> sampled_positions();

}  // namespace tarn::runtime
