#pragma once
/// \file State sets of the language as subspaces at one s of one grid point.

#include <cstdint>
#include <variant>
#include <vector>

#include "runtime/experiment/chip_levels.h"

namespace tarn::runtime {

struct Everything {};
/// Basis states by index.
struct BasisStates {
  std::vector<std::uint64_t> indices;
};
/// Orthonormal columns; population is the sum over them.
struct SpannedSpace {
  Eigen::MatrixXcd vectors;
  double error = 0;  ///< Upper estimate of the angle to the true space [rad].
};
using Subspace = std::variant<Everything, BasisStates, SpannedSpace>;

/// The answer meant: the lowest basis states of the diagonal of H at s = 1 with anneal offsets off.
struct Target {
  std::vector<std::uint64_t> states;
  bool diagonal = true;  ///< False: H has other terms there, which the diagonal leaves out.
};

/// Ties within 1e-9 of the range of the diagonal. `functions` is changed and put back.
/// Errors: `constant_target` if the diagonal is constant, `not_finite`.
Result<Target, RunError> find_target(const Plan& plan, Functions& functions);

/// The levels of a set: where all of `ground` and `level(k)` belong to subspaces that do not depend
/// on the choice of vectors inside a degenerate level.
Result<SpannedSpace, RunError> level_space(const StateSet& set, ChipLevels& levels, double s,
                                           std::span<const double> settings);

/// A set with letters 0 and 1 only as a basis state, else as the space of its product state.
Subspace lettered_space(const std::string& letters);

/// Population of a subspace: <psi|P|psi> or Tr(P rho).
double population(const Subspace& space, const State& state);

/// Adds weight times the population of every basis state to `sums` (made N long if empty).
void add_basis_populations(const State& state, double weight, std::vector<double>& sums);

/// Columns first .. last - 1 of `levels`, with the angle their residual allows.
SpannedSpace space_of(const Levels& levels, Eigen::Index first, Eigen::Index last);

}  // namespace tarn::runtime
