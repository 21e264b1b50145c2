#pragma once
/// \file A small system whose baths remember: what the hierarchy and the driven second-order equation take.
///
/// H(s, t) + sum_c A_c(s) B_c, each B_c with a bath of its own, independent of the others, given as
/// C_c(t) = <B_c(t) B_c(0)> = a sum of exponentials. Energies in rad/ns (hbar = 1), t in ns, computational basis.

#include <Eigen/Core>
#include <functional>
#include <span>
#include <variant>
#include <vector>

#include "runtime/bath/exponential_sum.h"
#include "runtime/equation/propagate.h"
#include "runtime/equation/timeline.h"

namespace tarn::runtime {

/// A_c(s): N x N, Hermitian.
struct SystemCoupling {
  std::function<void(double s, Eigen::MatrixXcd& a)> at;
  bool constant = false;  ///< Does not change with s: asked for once.
};

struct OpenSystem {
  Eigen::Index dimension = 0;  ///< N.
  std::function<void(double s, double t, Eigen::MatrixXcd& h)> hamiltonian;  ///< N x N, Hermitian.
  bool reads_t = false;        ///< H depends on t itself.
  std::vector<SystemCoupling> couplings;
  std::vector<ExponentialSum> baths;    ///< One for every coupling.
  std::vector<Eigen::MatrixXcd> jumps;  ///< L, its rate included: L rho L^dagger - {L^dagger L, rho}/2 [ns^-1/2].
};

struct MemoryRun {
  const Timeline* timeline = nullptr;
  std::span<const double> breaks;  ///< Where some schedule has a kink [ns], ascending.
  std::span<const double> times;   ///< Where the state is asked for [ns], ascending, within the timeline.
  /// What one step may err, in the 2-norm of all that is integrated (runtime/integrate/explicit.h).
  double tolerance = 1e-9;
};

}  // namespace tarn::runtime
