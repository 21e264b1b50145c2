#pragma once
/// \file Sums of Pauli words at fixed coefficients, acting on states. N = 2^n.

#include <span>
#include <string>
#include <vector>

#include "runtime/equation/propagate.h"
#include "runtime/plan/operators.h"

namespace tarn::runtime {

/// The words of a sum with their factors times the coefficients of their groups.
std::vector<WordTerm> scaled_words(const OperatorSum& sum, std::span<const double> coefficients);

/// True if the matrix is real for real coefficients.
bool has_real_matrix(const OperatorSum& sum);

/// The N x N matrix of a sum of words.
Eigen::MatrixXcd dense_operator(const std::vector<WordTerm>& words, std::size_t qubits);

/// <psi|A|psi> or Tr(A rho).
std::complex<double> mean_of(const std::vector<WordTerm>& words, const State& state);

/// Upper bound of the operator norm: the sum of the moduli of the factors.
double norm_bound(const std::vector<WordTerm>& words);

/// Diagonal of a sum of words without their flips, N numbers.
Eigen::VectorXd diagonal_of(const std::vector<WordTerm>& words, std::size_t qubits);

/// The product state written as one of 0 1 + - for each qubit, the first placed leftmost.
/// Precondition: only those letters.
Ket product_state(const std::string& letters);

}  // namespace tarn::runtime
