#pragma once
/// \file Products of small dense matrices, for the host's widest registers.

#include <complex>

#include "runtime/levels/family.h"

namespace tarn::runtime {

/// Buffers that products reuse: a loop that keeps one asks the system for memory only once.
struct Scratch {
  Matrix<double> left, right, both;
  Matrix<std::complex<double>> turned, adjoint, power[4];
};

/// c <- a b; c is neither a nor b. Real products of 8 rows or more run on the clones of packs.h, the
/// rest in Eigen: the bits depend on the shape and the host alone.
template <class Scalar>
void multiply(const Matrix<Scalar>& a, const Matrix<Scalar>& b, Matrix<Scalar>& c, Scratch& scratch);

template <class Scalar>
Matrix<Scalar> product(const Matrix<Scalar>& a, const Matrix<Scalar>& b) {
  Scratch scratch;
  Matrix<Scalar> c;
  multiply<Scalar>(a, b, c, scratch);
  return c;
}

/// rho <- r rho r^dagger.
void turn(const Matrix<std::complex<double>>& r, Eigen::MatrixXcd& rho, Scratch& scratch);

}  // namespace tarn::runtime
