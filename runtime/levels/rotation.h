#pragma once
/// \file Exponential and logarithm of rotations between frames.

#include <complex>

#include "runtime/levels/family.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {

/// exp(w) for antisymmetric (anti-Hermitian) w, to 1e-15: a Taylor polynomial of order 2 to 8, halved and
/// squared where |w| > 0.06.
template <class Scalar>
Matrix<Scalar> rotation_exponential(const Matrix<Scalar>& w);

/// The same into `r`, which is not `w`, with buffers kept by the caller.
void rotation_exponential(const Matrix<std::complex<double>>& w, Matrix<std::complex<double>>& r, Scratch& scratch);

/// The antisymmetric (anti-Hermitian) w with exp(w) = r, for a rotation r by angles below 2 rad. The iteration
/// w += sine part of r exp(-w) takes an angle's error e to e^3/6. Beyond 2 rad the result is some antisymmetric matrix.
template <class Scalar>
Matrix<Scalar> rotation_logarithm(const Matrix<Scalar>& r);

}  // namespace tarn::runtime
