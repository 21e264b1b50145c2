#pragma once
/// \file The operator form applied to density matrices of one to three qubits.

#include <Eigen/Core>
#include <span>

namespace tarn::runtime {

/// left rho right^dagger; matrices as N^2 pairs, column after column.
struct SmallTerm {
  const double* left = nullptr;
  bool real = false;                 ///< left is N^2 real numbers, and right is left.
  const double* right = nullptr;     ///< Null: as `left`, unless there is a diagonal.
  const double* diagonal = nullptr;  ///< right is real and diagonal: N numbers.
};

/// out = X + X^dagger, X = drift rho + sum of the terms, rho Hermitian. n = 2, 4 or 8.
void apply_small(Eigen::Index n, const double* drift, std::span<const SmallTerm> terms, const double* rho, double* out);

}  // namespace tarn::runtime
