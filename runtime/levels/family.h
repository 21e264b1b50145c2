#pragma once
/// \file A chip's Hamiltonian and noise operators as functions of s, and what tracking needs of them.
/// Energies in rad/ns (hbar = 1); s is the anneal fraction; N = 2^qubits.

#include <Eigen/Core>
#include <cstddef>
#include <cstdint>
#include <functional>
#include <span>
#include <vector>

#include "runtime/plan/operators.h"

namespace tarn::runtime {

template <class Scalar>
using Matrix = Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic>;
template <class Scalar>
using MatrixRef = Eigen::Ref<const Matrix<Scalar>>;

/// Fills out[row * s.size() + point] with every coefficient row at every s.
using CoefficientFunction = std::function<void(std::span<const double> s, double* out)>;

/// H(s) and the couplings A_c(s) to the baths. Groups name their coefficient by row. Terms that
/// depend on the time itself are not part of it: they drive the state and enter no level.
struct HamiltonianFamily {
  int qubits = 0;
  std::uint32_t rows = 0;  ///< Coefficient rows filled by the two functions below.
  OperatorSum hamiltonian;
  std::vector<OperatorSum> couplings;
  CoefficientFunction coefficients;
  CoefficientFunction derivative;  ///< d/ds of each row.
  std::vector<double> breaks;      ///< Values of s where a schedule or its slope jumps.
};

/// True where H and all couplings are real matrices for real coefficients: every word holds an
/// even number of Y and every factor is real.
bool is_real(const HamiltonianFamily& family);

/// The sum of the words as an N x N matrix. Precondition for Scalar = double: the words are real.
template <class Scalar>
Matrix<Scalar> dense_matrix(const std::vector<WordTerm>& terms, int qubits);

/// Lowest levels at one s. Column a of `vectors` (N x K, orthonormal) belongs to energies[a].
template <class Scalar>
struct Frame {
  double s = 0;
  Eigen::VectorXd energies;
  Matrix<Scalar> vectors;
  double next = 0;      ///< Lowest energy that is not kept; +infinity if all are.
  double residual = 0;  ///< max over columns of |H v - E v|: each energy is this close to a level.
};

/// What tracking asks of a chip. An eigensolver for large chips enters here: it supplies the three
/// functions, which must be pure and safe to call from several threads.
template <class Scalar>
struct LevelModel {
  Eigen::Index dimension = 0;
  std::size_t couplings = 0;
  std::vector<double> breaks;
  /// The `count` lowest levels at s, energies ascending.
  std::function<Frame<Scalar>(double s, Eigen::Index count)> solve;
  /// (dH/ds) times the columns given.
  std::function<Matrix<Scalar>(double s, const Matrix<Scalar>& columns)> slope;
  /// A_c(s) times the columns given.
  std::function<Matrix<Scalar>(std::size_t c, double s, const Matrix<Scalar>& columns)> coupling;
};

/// Dense matrices for each coefficient group, full diagonalisation: meant for up to 8 qubits.
/// Residuals are those of the LAPACK-style QR algorithm, about 1e-14 of the spectral width.
template <class Scalar>
LevelModel<Scalar> dense_levels(const HamiltonianFamily& family);

/// H(s) as one matrix, dense.
template <class Scalar>
std::function<Matrix<Scalar>(double s)> dense_hamiltonian(const HamiltonianFamily& family);

}  // namespace tarn::runtime
