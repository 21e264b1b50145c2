#pragma once
/// \file Products of small dense matrices, for the host's widest registers.

#include "runtime/levels/family.h"

namespace tarn::runtime {

/// a b. Real ones of 8 rows or more run on the clones of packs.h, the rest in Eigen: the bits depend on the
/// shape and the host alone.
template <class Scalar>
Matrix<Scalar> product(const Matrix<Scalar>& a, const Matrix<Scalar>& b);

/// rho <- r rho r^dagger.
template <class Scalar>
void turn(const Matrix<Scalar>& r, Eigen::MatrixXcd& rho);

}  // namespace tarn::runtime
