#include "runtime/linear/eigensystem.h"

#include <Eigen/Eigenvalues>

namespace tarn::runtime {
namespace {

template <class Matrix>
auto solved(const Matrix& matrix) {
  const Eigen::SelfAdjointEigenSolver<Matrix> solver(matrix);
  return Eigensystem<typename Matrix::Scalar>{solver.eigenvalues(), solver.eigenvectors(), solver.info() == Eigen::Success};
}

}  // namespace

Eigensystem<double> eigensystem(const Eigen::MatrixXd& matrix) { return solved(matrix); }
Eigensystem<std::complex<double>> eigensystem(const Eigen::MatrixXcd& matrix) { return solved(matrix); }

}  // namespace tarn::runtime
