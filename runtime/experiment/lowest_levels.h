#pragma once
/// \file Lowest levels of a Hermitian matrix that is known by its product with a vector.

#include <Eigen/Core>
#include <functional>

#include "lang/support/result.h"
#include "runtime/equation/propagate.h"

namespace tarn::runtime {

/// Column a of `vectors` (N x K, orthonormal) belongs to energies[a], ascending, in rad/ns.
struct Levels {
  Eigen::VectorXd energies;
  Eigen::MatrixXcd vectors;
  double width = 0;     ///< Highest minus lowest level; of an iterative solve a close lower estimate.
  double residual = 0;  ///< Largest |H v - E v|: every energy is within it of a level.
  bool complete = false;  ///< All N levels are there.
};

/// y = H x; both have N amplitudes.
using HermitianProduct = std::function<void(const std::complex<double>* x, std::complex<double>* y)>;

/// All levels of a dense Hermitian matrix; a real one is solved in real arithmetic.
Levels all_levels(const Eigen::MatrixXcd& matrix);

/// The `count` lowest levels by a block Krylov space with thick restarts and full
/// orthogonalisation. Copies of a degenerate level beyond the block are looked for: with the
/// levels found held fixed, fresh random vectors must turn up nothing below the highest of them.
/// Residuals are at most 1e-10 of the width. `real`: H is a real matrix, which is searched in real
/// arithmetic. `start` (N x any, may be empty; of a real H real) speeds it up.
/// The result is a function of the arguments alone.
/// Errors: `levels_not_found` after 4000 products per level, `interrupted`, `not_finite`.
/// Precondition: 1 <= count, 8 count <= N.
/// Method: thick restarts as in SIAM J. Matrix Anal. Appl. 22, 602 (2000), with a block of residuals.
Result<Levels, RunError> lowest_levels(Eigen::Index dimension, Eigen::Index count, const HermitianProduct& product,
                                       bool real, const Eigen::MatrixXcd& start, const Interrupted& interrupted);

}  // namespace tarn::runtime
