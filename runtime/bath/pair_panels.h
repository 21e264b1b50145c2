#pragma once
/// \file What pair functions are made with: Chebyshev interpolation and decompositions at its nodes.

#include <Eigen/Core>

namespace tarn::runtime {

/// First-kind Chebyshev nodes on [-1, 1], ascending, and their barycentric weights. SIAM Review 46, 501 (2004).
Eigen::VectorXd chebyshev_nodes(Eigen::Index count);
Eigen::VectorXd chebyshev_weights(Eigen::Index count);

/// The Lagrange polynomials of all nodes at u: node.size() values.
void lagrange_values(const Eigen::VectorXd& node, const Eigen::VectorXd& weight, double u, double* value);

/// A symmetric matrix as sum_q values[q] v_q v_q^T, largest |value| first.
struct Decomposition {
  Eigen::VectorXd values;
  Eigen::MatrixXd vectors;  ///< In columns.
};
Decomposition decompose(const Eigen::MatrixXd& matrix);

/// Leaves out what is no larger than `smallest`: no element of the sum changes by more.
void keep_above(Decomposition& d, double smallest);

}  // namespace tarn::runtime
