#pragma once
/// \file Gauss-Legendre quadrature on [-1, 1] and Legendre polynomials. DLMF 3.5(v), 14.7.

#include <Eigen/Core>

namespace tarn::runtime {

constexpr Eigen::Index kGauss = 16;

struct GaussRule {
  Eigen::ArrayXd node;     ///< kGauss of them, ascending.
  Eigen::ArrayXd weight;
  /// int_-1^1 P_k f for k < kGauss to the values at the nodes of the polynomial with these moments.
  Eigen::MatrixXd expand;
};
const GaussRule& gauss_rule();

/// P_k(u), k < kGauss. Shape: (u.size(), kGauss).
Eigen::MatrixXd legendre_values(const Eigen::ArrayXd& u);

}  // namespace tarn::runtime
