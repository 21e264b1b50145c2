#pragma once
/// \file Random chips as text, beside the matrices that they mean, a pure function of the seed.

#include <Eigen/Core>
#include <functional>
#include <map>
#include <random>
#include <string>
#include <vector>

namespace tarn::test {

/// coefficient(s, t) [rad/ns] times one 2 x 2 matrix a qubit, identity where none is named.
struct ProductTerm {
  std::function<double(double s, double t)> coefficient;
  std::map<std::size_t, Eigen::Matrix2cd> factors;
};

struct RandomChip {
  std::string text;  ///< A model with one experiment; parameters g (a number) and f (a frequency).
  std::size_t qubits = 0;
  std::vector<ProductTerm> terms;
};

/// 1 to 8 qubits: some alone, some in nested chips, some with offsets; the values of g and f [rad/ns]
/// are those that the terms are computed with.
RandomChip random_chip(unsigned seed, double g, double f);

/// The sum of the terms, by Kronecker products; the first qubit is the leftmost factor.
Eigen::MatrixXcd matrix_of(const RandomChip& chip, double s, double t);

}  // namespace tarn::test
