#pragma once
/// \file Two neighbouring frames and the rotation that carries the levels of one into the other.
///
/// Every frame keeps whatever basis its eigensolver gave. A link finds, inside exactly degenerate
/// manifolds, the basis on either side that continues into the other side, matches the labels
/// (levels of different symmetry may cross: labels follow the state, not the order), and writes
/// the overlap as  V_right^dagger V_left = right_basis exp(rotation) left_basis^dagger.

#include <Eigen/Core>

#include "runtime/levels/family.h"

namespace tarn::runtime {

template <class Scalar>
struct Link {
  double s_left = 0, s_right = 0;
  /// K x K unitary; empty means identity. Columns: the adapted basis in terms of the frame's own.
  Matrix<Scalar> left_basis, right_basis;
  /// K x K, antisymmetric (anti-Hermitian). Its a,b element is the integral of -<a|d/ds b> ds; zero
  /// within manifolds that stay degenerate.
  Matrix<Scalar> rotation;
  /// Energies of the adapted labels on either side, and their mean over the link: trapezoid with
  /// end slopes, error ds^4 E''''/720.
  Eigen::VectorXd left_energies, right_energies, mean_energies;
  /// dE/ds of the adapted labels, as seen from inside the link.
  Eigen::VectorXd left_slopes, right_slopes;
  /// Column a: squared norm of level a of the left frame that the right frame does not keep.
  Eigen::VectorXd lost;
};

/// Levels closer than `tolerance` [rad/ns], chained, form a manifold: its ordinal for every label.
std::vector<int> manifolds(const Eigen::VectorXd& energies, double tolerance);

/// Joins two frames with the same number of levels. `tolerance` [rad/ns] says what is degenerate.
template <class Scalar>
Link<Scalar> make_link(const LevelModel<Scalar>& model, const Frame<Scalar>& left,
                       const Frame<Scalar>& right, double tolerance);

/// Turns `right` into the basis adapted to the link, so that link.right_basis becomes empty.
template <class Scalar>
void orient(Frame<Scalar>& right, Link<Scalar>& link);

}  // namespace tarn::runtime
