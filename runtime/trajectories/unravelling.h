#pragma once
/// \file A completely positive equation as pure states see it: what they do between jumps, and the jumps.
///
///   d rho/dt = G rho + rho G^dagger + sum_j L_j rho L_j^dagger,   G = -i(H + shifts) - sum_j L_j^dagger L_j / 2.
///
/// Everything in the computational basis, N = 2^n; energies in rad/ns, t in ns.

#include <Eigen/Core>
#include <functional>
#include <memory>
#include <vector>

#include "runtime/equation/davies_table.h"
#include "runtime/equation/propagate.h"
#include "runtime/generator/noise_table.h"
#include "runtime/generator/open_generator.h"

namespace tarn::runtime {

/// What the jumps make of one state.
struct JumpImages {
  Eigen::MatrixXcd images;  ///< Column j is L_j psi, in the columns of `basis`.
  Eigen::MatrixXcd basis;   ///< Orthonormal columns; empty: the computational basis.
};

/// Both functions are pure and may be called from several threads.
struct Unravelling {
  Eigen::Index dimension = 0;
  bool reads_t = false;  ///< G or a jump depends on t itself, beside s.
  /// G at s and t, N x N. False where a coefficient is not finite.
  std::function<bool(double s, double t, Eigen::MatrixXcd& drift)> drift;
  /// Only where drift() is finite. The squared norms are the rates of the jumps: their sum is -2 Re <psi|G|psi>.
  std::function<void(double s, double t, const Ket& psi, JumpImages& out)> jumps;
};

/// The universal or the coarse-grained equation with the jumps as written. The table is one made with
/// NoiseTableOptions::keep_operators, not Redfield's.
Unravelling unravel_fast_noise(std::shared_ptr<const NoiseTable> table, LabOperators lab, bool reads_t);

/// Davies' equation among the `levels` lowest levels of each instant (0: all), with the jumps as written; frequencies
/// that `tolerance` [rad/ns] does not tell apart belong to one jump. One bath for every coupling. Without a
/// table of davies_drift() each drift() costs a diagonalisation.
template <class Scalar>
Unravelling unravel_davies(LevelModel<Scalar> model, std::vector<BathFunctions> baths, double tolerance,
                           Eigen::Index levels, LabOperators lab, bool reads_t,
                           std::shared_ptr<const SmoothTable> table = {});

/// What the baths add to G along s, shared by all runs of one chip and its baths; options.size is set here. Null if
/// interrupted.
template <class Scalar>
std::shared_ptr<const SmoothTable> davies_drift(const LevelModel<Scalar>& model, const std::vector<BathFunctions>& baths,
                                                double tolerance, Eigen::Index levels, const SmoothTable::Options& options);

}  // namespace tarn::runtime
