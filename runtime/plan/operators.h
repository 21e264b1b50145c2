#pragma once
/// \file Operators of a chip as sums of Pauli words with coefficient functions.

#include <complex>
#include <cstdint>
#include <vector>

namespace tarn::runtime {

/// A product of Pauli matrices: i^popcount(x & z) X^x Z^z, so a bit in x alone is X, in z
/// alone Z, in both Y, and every word is Hermitian. Qubit q of n (counted from 0 in the
/// order placed) is bit n-1-q: the first placed qubit is the most significant bit.
/// Matrix element: <i ^ x| word |i> = i^popcount(x & z) (-1)^popcount(z & i).
struct PauliWord {
  std::uint64_t x = 0;
  std::uint64_t z = 0;
  bool operator==(const PauliWord&) const = default;
  auto operator<=>(const PauliWord&) const = default;
};

/// factor * word. A Hermitian operator has real factors.
struct WordTerm {
  std::complex<double> factor;
  PauliWord word;
};

/// c(s, t) * sum of terms, where c is a scalar function named by its row in a function table.
struct OperatorGroup {
  std::uint32_t coefficient = 0;
  std::vector<WordTerm> terms;
};

/// Sum of groups; no two groups share a coefficient.
struct OperatorSum {
  std::vector<OperatorGroup> groups;
};

}  // namespace tarn::runtime
