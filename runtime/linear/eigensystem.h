#pragma once
/// \file Eigenvalues of dense Hermitian matrices. Eigen's solvers take long to compile: this is their
/// only place.

#include <Eigen/Core>
#include <complex>

namespace tarn::runtime {

/// Column k of `vectors` (N x N, orthonormal) belongs to values[k], ascending.
template <class Scalar>
struct Eigensystem {
  Eigen::VectorXd values;
  Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic> vectors;
  bool converged = false;  ///< False where the matrix is not finite.
};

/// Of a symmetric (Hermitian) matrix; only its lower triangle is read. Errors are about 1e-15 of the largest
/// value.
Eigensystem<double> eigensystem(const Eigen::MatrixXd& matrix);
Eigensystem<std::complex<double>> eigensystem(const Eigen::MatrixXcd& matrix);

}  // namespace tarn::runtime
