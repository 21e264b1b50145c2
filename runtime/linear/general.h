#pragma once
/// \file Eigenvalues and linear systems of dense matrices that are not Hermitian. Eigen's solvers take
/// long to compile: this is their only place.

#include <Eigen/Core>
#include <optional>

namespace tarn::runtime {

/// matrix = right diag(values) left, left right = 1.
struct GeneralEigensystem {
  Eigen::VectorXcd values;
  Eigen::MatrixXcd right;  ///< Column k belongs to values[k]; norm 1.
  Eigen::MatrixXcd left;   ///< Row k likewise.
};

/// Empty where the matrix is not finite, or has no complete set of eigenvectors to 1e-12.
std::optional<GeneralEigensystem> general_eigensystem(const Eigen::MatrixXcd& matrix);

/// x with matrix x = b. Empty where the matrix is singular to 1e-13.
std::optional<Eigen::VectorXcd> solve(const Eigen::MatrixXcd& matrix, const Eigen::VectorXcd& b);

}  // namespace tarn::runtime
