#include "runtime/experiment/words.h"

#include <bit>
#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Eigen::Index;

/// i^popcount(x & z), the part of a word's elements that all share.
Complex phase(const PauliWord& word) {
  constexpr Complex kPowers[] = {{1, 0}, {0, 1}, {-1, 0}, {0, -1}};
  return kPowers[std::popcount(word.x & word.z) & 3];
}

double sign(std::uint64_t z, Index i) { return std::popcount(z & static_cast<std::uint64_t>(i)) & 1 ? -1.0 : 1.0; }

Index flipped(const PauliWord& word, Index i) { return i ^ static_cast<Index>(word.x); }

Complex mean_of_word(const PauliWord& word, const Ket& psi) {
  Complex sum = 0;
  for (Index i = 0; i < psi.size(); ++i) sum += sign(word.z, i) * std::conj(psi[flipped(word, i)]) * psi[i];
  return phase(word) * sum;
}

Complex mean_of_word(const PauliWord& word, const Density& rho) {
  Complex sum = 0;
  for (Index i = 0; i < rho.rows(); ++i) sum += sign(word.z, i) * rho(i, flipped(word, i));
  return phase(word) * sum;
}

}  // namespace

std::vector<WordTerm> scaled_words(const OperatorSum& sum, std::span<const double> coefficients) {
  std::vector<WordTerm> words;
  for (const OperatorGroup& group : sum.groups) {
    for (const WordTerm& term : group.terms) {
      words.push_back({term.factor * coefficients[group.coefficient], term.word});
    }
  }
  return words;
}

bool has_real_matrix(const OperatorSum& sum) {
  for (const OperatorGroup& group : sum.groups) {
    for (const WordTerm& term : group.terms) {
      if ((term.factor * phase(term.word)).imag() != 0) return false;
    }
  }
  return true;
}

Eigen::MatrixXcd dense_operator(const std::vector<WordTerm>& words, std::size_t qubits) {
  const Index size = Index{1} << qubits;
  Eigen::MatrixXcd matrix = Eigen::MatrixXcd::Zero(size, size);
  for (const WordTerm& term : words) {
    const Complex factor = term.factor * phase(term.word);
    for (Index i = 0; i < size; ++i) matrix(flipped(term.word, i), i) += factor * sign(term.word.z, i);
  }
  return matrix;
}

std::complex<double> mean_of(const std::vector<WordTerm>& words, const State& state) {
  Complex sum = 0;
  for (const WordTerm& term : words) {
    sum += term.factor * std::visit([&](const auto& psi) { return mean_of_word(term.word, psi); }, state);
  }
  return sum;
}

double norm_bound(const std::vector<WordTerm>& words) {
  double sum = 0;
  for (const WordTerm& term : words) sum += std::abs(term.factor);
  return sum;
}

Eigen::VectorXd diagonal_of(const std::vector<WordTerm>& words, std::size_t qubits) {
  const Index size = Index{1} << qubits;
  Eigen::VectorXd diagonal = Eigen::VectorXd::Zero(size);
  for (const WordTerm& term : words) {
    if (term.word.x != 0) continue;
    for (Index i = 0; i < size; ++i) diagonal[i] += term.factor.real() * sign(term.word.z, i);
  }
  return diagonal;
}

Ket product_state(const std::string& letters) {
  Ket state = Ket::Ones(1);
  for (const char letter : letters) {
    TARN_CHECK(letter == '0' || letter == '1' || letter == '+' || letter == '-');
    const double half = std::sqrt(0.5);
    const double zero = letter == '0' ? 1 : letter == '1' ? 0 : half;
    const double one = letter == '0' ? 0 : letter == '1' ? 1 : letter == '+' ? half : -half;
    Ket next(2 * state.size());
    for (Index i = 0; i < state.size(); ++i) {
      next[2 * i] = zero * state[i];
      next[2 * i + 1] = one * state[i];
    }
    state = std::move(next);
  }
  return state;
}

}  // namespace tarn::runtime
