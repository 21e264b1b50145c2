#include "brute_hierarchy.h"

#include <complex>
#include <map>
#include <vector>

#include "tests/support/dense.h"

namespace tarn::runtime::testing {
namespace {

using Complex = std::complex<double>;
using Counts = std::vector<int>;

struct Term {
  std::size_t coupling;
  Exponential e;
};

void enumerate(std::size_t from, int left, Counts& n, std::map<Counts, Eigen::Index>& numbers) {
  numbers.emplace(n, static_cast<Eigen::Index>(numbers.size()));
  for (std::size_t k = from; k < n.size() && left > 0; ++k) {
    ++n[k];
    enumerate(k, left - 1, n, numbers);
    --n[k];
  }
}

/// Adds f x -> left x right to the block (row, column); matrices are stacked column by column.
void add(Eigen::MatrixXcd& l, Eigen::Index row, Eigen::Index column, Complex f, const Eigen::MatrixXcd& left,
         const Eigen::MatrixXcd& right) {
  const Eigen::Index n = left.rows();
  for (Eigen::Index i = 0; i < n; ++i)
    for (Eigen::Index j = 0; j < n; ++j)
      for (Eigen::Index k = 0; k < n; ++k)
        for (Eigen::Index m = 0; m < n; ++m)
          l(row * n * n + j * n + i, column * n * n + m * n + k) += f * left(i, k) * right(m, j);
}

}  // namespace

Density brute_hierarchy(const OpenSystem& system, int depth, const Density& initial, double t) {
  const Eigen::Index n = system.dimension;
  const Complex i(0, 1);
  const Eigen::MatrixXcd one = Eigen::MatrixXcd::Identity(n, n);
  std::vector<Eigen::MatrixXcd> a(system.couplings.size(), one);
  std::vector<Term> terms;
  for (std::size_t c = 0; c < a.size(); ++c) {
    system.couplings[c].at(0, a[c]);
    for (const Exponential& e : system.baths[c].terms) terms.push_back({c, e});
  }
  Eigen::MatrixXcd h = one;
  system.hamiltonian(0, 0, h);
  std::map<Counts, Eigen::Index> numbers;
  Counts counts(terms.size(), 0);
  enumerate(0, depth, counts, numbers);
  const auto size = static_cast<Eigen::Index>(numbers.size());
  Eigen::MatrixXcd l = Eigen::MatrixXcd::Zero(size * n * n, size * n * n);
  for (const auto& [occupation, row] : numbers) {
    add(l, row, row, -i, h, one);
    add(l, row, row, i, one, h);
    for (const Eigen::MatrixXcd& jump : system.jumps) {
      const Eigen::MatrixXcd square = tarn::test::product_of(jump.adjoint(), jump);
      add(l, row, row, 1, jump, jump.adjoint());
      add(l, row, row, -0.5, square, one);
      add(l, row, row, -0.5, one, square);
    }
    for (std::size_t c = 0; c < a.size(); ++c) {
      const Eigen::MatrixXcd square = tarn::test::product_of(a[c], a[c]);
      add(l, row, row, -system.baths[c].rest, square, one);
      add(l, row, row, -system.baths[c].rest, one, square);
      add(l, row, row, 2 * system.baths[c].rest, a[c], a[c]);
    }
    for (std::size_t k = 0; k < terms.size(); ++k) {
      const Eigen::MatrixXcd& op = a[terms[k].coupling];
      const double many = occupation[k];
      add(l, row, row, -many * terms[k].e.rate, one, one);
      Counts other = occupation;
      ++other[k];
      if (const auto up = numbers.find(other); up != numbers.end()) {
        add(l, row, up->second, -i, op, one);
        add(l, row, up->second, i, one, op);
      }
      other[k] -= 2;
      if (other[k] < 0) continue;
      const Eigen::Index down = numbers.at(other);
      add(l, row, down, -i * many * terms[k].e.coefficient, op, one);
      add(l, row, down, i * many * terms[k].e.conjugate, one, op);
    }
  }
  const Eigen::MatrixXcd map = tarn::test::exponential_of(t * l);
  Density result = Density::Zero(n, n);
  for (Eigen::Index j = 0; j < n; ++j)
    for (Eigen::Index k = 0; k < n; ++k) result += initial(k, j) * map.block(0, j * n + k, n * n, 1).reshaped(n, n);
  return result;
}

}  // namespace tarn::runtime::testing
