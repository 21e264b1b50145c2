#pragma once
/// \file Hierarchical equations of motion: numerically exact for baths whose correlation functions are sums of
/// exponentials, at any coupling strength, for any drive. 1 to 3 qubits.
///
/// For every set n of occupations of the exponentials (see hierarchy_indices.h) one N x N matrix, n = 0 the state:
///   d rho_n/dt = -i [H, rho_n] - sum_k n_k nu_k rho_n - i sum_k [A_k, rho_{n+k}]
///                - i sum_k n_k (c_k A_k rho_{n-k} - c*_k rho_{n-k} A_k) - sum_c rest_c [A_c, [A_c, rho_n]] + jumps,
/// with c*_k the coefficient of the same exponential in C(t)*. Sources: J. Phys. Soc. Jpn. 58, 101 (1989) and
/// 74, 3131 (2005); scaling J. Chem. Phys. 130, 084105 (2009). It errs by what lies beyond the depth, by the sum
/// of exponentials itself, and by the integration; hierarchy_refinement.h estimates all three.

#include <cstddef>
#include <optional>
#include <variant>
#include <vector>

#include "lang/support/result.h"
#include "runtime/equation/hierarchy_blocks.h"
#include "runtime/equation/open_system.h"

namespace tarn::runtime {

/// All matrices of a hierarchy, in the layout of hierarchy_blocks.h: the state with its memory of the baths.
struct HierarchyState {
  int depth = 0;
  std::vector<double> blocks;
};

/// A state without memory of the baths (which begin in equilibrium), or one with.
using HierarchyStart = std::variant<Density, HierarchyState>;

/// Bytes that a propagation takes at this depth, before anything is made. May be more than any machine has.
double hierarchy_bytes(const OpenSystem& system, int depth);

/// The error `too_large` if there are more matrices than can be numbered.
std::optional<RunError> too_large_hierarchy(const OpenSystem& system, int depth);

/// One propagation. `visit` gets a Density. A HierarchyState must have this depth and these baths. Errors: not_finite,
/// step_underflow, interrupted, too_large. Trace and Hermiticity hold to rounding, positivity to within the error.
/// Precondition: the dimension is 2, 4 or 8, depth >= 1.
Result<Counters, RunError> propagate_hierarchy(const OpenSystem& system, int depth, const MemoryRun& run,
                                               const HierarchyStart& initial, const Visit& visit,
                                               const Interrupted& interrupted);

/// The hierarchy of one system at one depth, to be used by one thread at a time.
class HierarchyEquation {
 public:
  HierarchyEquation(const OpenSystem& system, int depth);

  std::size_t size() const { return size_; }  ///< Doubles of a state.
  const HierarchyIndices& indices() const { return indices_; }
  const OpenSystem& system() const { return system_; }

  /// As SteppedEquation asks for.
  bool prepare(std::size_t node, double s, double t);
  void derivative(std::size_t node, const double* x, double* d) const;

 private:
  const OpenSystem& system_;
  HierarchyIndices indices_;
  std::size_t size_ = 0;
  std::vector<double> rests_;
  std::vector<HierarchyOperators> nodes_;
  Eigen::MatrixXcd hamiltonian_;
  std::vector<Eigen::MatrixXcd> couplings_;
};

}  // namespace tarn::runtime
