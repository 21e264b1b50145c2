#pragma once
/// \file Dense linear algebra to compare with, by Eigen 3.4 and nothing of Tarn's.

#include <Eigen/Core>

namespace tarn::test {

/// Column k of `vectors` belongs to energies[k], ascending.
struct DenseLevels {
  Eigen::VectorXd energies;
  Eigen::MatrixXcd vectors;
};

/// Of a Hermitian matrix (SelfAdjointEigenSolver).
DenseLevels dense_levels_of(const Eigen::MatrixXcd& hamiltonian);

/// Written as a function because every form of product that Eigen meets is compiled anew.
Eigen::MatrixXcd product_of(const Eigen::MatrixXcd& a, const Eigen::MatrixXcd& b);

/// Of any square matrix (MatrixFunctions: scaling and squaring of Pade approximants).
Eigen::MatrixXcd exponential_of(const Eigen::MatrixXcd& matrix);

}  // namespace tarn::test
