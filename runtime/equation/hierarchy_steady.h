#pragma once
/// \file The stationary state of a hierarchy at one s, by an iterative solution of L x = 0.

#include "lang/support/result.h"
#include "runtime/equation/hierarchy.h"

namespace tarn::runtime {

struct StationaryHierarchy {
  HierarchyState state;   ///< With its memory: a run may begin there.
  Density rho;            ///< Its density matrix, trace 1.
  double residual = 0;    ///< Of the solution, as an error of the state in the 2-norm (an estimate).
  Counters counters;
};

/// Generalised minimal residuals (SIAM J. Sci. Stat. Comput. 7, 856 (1986)), preconditioned by the turning and the
/// decay of each matrix alone. Where several states are stationary it finds one of them, that nearest to equal
/// populations. H is taken at this s and t = 0. Takes the memory of a propagation, or 100 MB if that is more.
/// Errors: not_converged (with the residual reached), not_finite, interrupted, too_large.
Result<StationaryHierarchy, RunError> stationary_hierarchy(const OpenSystem& system, int depth, double s, double tolerance,
                                                           const Interrupted& interrupted);

}  // namespace tarn::runtime
