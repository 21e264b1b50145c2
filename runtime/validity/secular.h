#pragma once
/// \file What the secular step of Davies' equation throws away.

#include <Eigen/Core>
#include <functional>
#include <span>
#include <vector>

namespace tarn::runtime {

struct SecularRatio {
  double ratio = 0;    ///< The largest of sqrt(gamma(w) gamma(w')) |A_ik A_jl| / |w - w'| over the terms left out.
  double rate = 0;     ///< Its numerator [1/ns].
  double spacing = 0;  ///< Its denominator [rad/ns].
};

/// Terms of the second-order generator that turn with w - w' are left out because they average to nothing before
/// the state changes: so each must be small against the frequency it turns with. Which are left out depends
/// on the operators too: frequencies that no operator has in common never meet.
/// `elements`: <a|A_c|b> among the levels kept, K x K, one for every coupling; `rates`: gamma_c [1/ns] of many w at once.
/// Frequencies closer than `tolerance` [rad/ns] coincide and are kept.
SecularRatio secular_ratio(const Eigen::VectorXd& energies, std::span<const Eigen::MatrixXcd> elements,
                           std::span<const std::function<void(std::span<const double>, double*)>> rates, double tolerance);

}  // namespace tarn::runtime
