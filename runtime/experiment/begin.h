#pragma once
/// \file The state a run begins with.

#include <vector>

#include "runtime/experiment/chip_levels.h"

namespace tarn::runtime {

/// Orthonormal kets with weights that sum to 1; they are positive but where an equation's own stationary state is
/// not. One ket is a pure state.
struct Mixture {
  std::vector<Ket> kets;
  std::vector<double> weights;
};

/// The mixture as a density matrix.
Density density_of(const Mixture& mixture);
/// The eigenvectors of a density matrix.
Mixture mixture_of(const Density& rho);

/// The state `begin` names (`steady` apart: who has the generator finds it), from the levels at the first s. A weight that belongs to one of several
/// levels that coincide is shared evenly among them. Weights below 1e-16 of the largest are dropped.
/// Errors: `not_finite`, `no_common_temperature` (baths differ or there are none),
/// `negative_temperature`, `bad_populations` (negative, or their sum is not 1 within 1e-9),
/// and those of ChipLevels.
Result<Mixture, RunError> begin_state(const Plan& plan, ChipLevels& levels, double first_s,
                                      std::span<const double> settings);

}  // namespace tarn::runtime
