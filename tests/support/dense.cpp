#include "tests/support/dense.h"

#include <Eigen/Eigenvalues>
#include <unsupported/Eigen/MatrixFunctions>

namespace tarn::test {

DenseLevels dense_levels_of(const Eigen::MatrixXcd& hamiltonian) {
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXcd> solver(hamiltonian);
  return {solver.eigenvalues(), solver.eigenvectors()};
}

Eigen::MatrixXcd product_of(const Eigen::MatrixXcd& a, const Eigen::MatrixXcd& b) { return a * b; }

Eigen::MatrixXcd exponential_of(const Eigen::MatrixXcd& matrix) { return matrix.exp(); }

}  // namespace tarn::test
