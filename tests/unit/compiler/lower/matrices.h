#pragma once
/// \file Pauli words and sums as dense matrices, built from Kronecker products of the 2 x 2 ones.

#include <Eigen/Core>
#include <complex>
#include <vector>

#include "runtime/plan/operators.h"

namespace tarn::testing {

using Matrix = Eigen::MatrixXcd;

inline Matrix kron(const Matrix& a, const Matrix& b) {
  Matrix result(a.rows() * b.rows(), a.cols() * b.cols());
  for (Eigen::Index i = 0; i < a.rows(); ++i) {
    for (Eigen::Index j = 0; j < a.cols(); ++j) result.block(i * b.rows(), j * b.cols(), b.rows(), b.cols()) = a(i, j) * b;
  }
  return result;
}

inline Matrix pauli(bool x, bool z) {
  const std::complex<double> i(0, 1);
  Matrix m(2, 2);
  if (x && z) m << 0, -i, i, 0;
  else if (x) m << 0, 1, 1, 0;
  else if (z) m << 1, 0, 0, -1;
  else m << 1, 0, 0, 1;
  return m;
}

inline Matrix matrix(const runtime::PauliWord& word, std::uint32_t bits) {
  Matrix result = Matrix::Identity(1, 1);
  for (std::uint32_t b = bits; b-- > 0;) result = kron(result, pauli((word.x >> b) & 1, (word.z >> b) & 1));
  return result;
}

inline Matrix matrix(const runtime::OperatorSum& sum, std::uint32_t bits, const std::vector<double>& coefficients) {
  const Eigen::Index size = Eigen::Index{1} << bits;
  Matrix result = Matrix::Zero(size, size);
  for (const auto& group : sum.groups) {
    for (const auto& term : group.terms) result += coefficients[group.coefficient] * term.factor * matrix(term.word, bits);
  }
  return result;
}

}  // namespace tarn::testing
