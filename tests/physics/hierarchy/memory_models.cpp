#include "memory_models.h"

#include <Eigen/Eigenvalues>
#include <catch2/catch.hpp>
#include <cmath>
#include <cstring>
#include <numbers>

#include "runtime/equation/hierarchy.h"
#include "tests/support/dense.h"

namespace tarn::runtime::testing {

using Complex = std::complex<double>;

Eigen::MatrixXcd pauli(char letter) {
  Eigen::MatrixXcd p = Eigen::MatrixXcd::Identity(2, 2);
  if (letter == 'X') p << 0, 1, 1, 0;
  if (letter == 'Y') p << 0, Complex(0, -1), Complex(0, 1), 0;
  if (letter == 'Z') p << 1, 0, 0, -1;
  return p;
}

Eigen::MatrixXcd pauli_word(const char* word) {
  Eigen::MatrixXcd p = Eigen::MatrixXcd::Identity(1, 1);
  for (; *word; ++word) {
    const Eigen::MatrixXcd one = pauli(*word);
    Eigen::MatrixXcd next(2 * p.rows(), 2 * p.cols());
    for (Eigen::Index i = 0; i < p.rows(); ++i)
      for (Eigen::Index j = 0; j < p.cols(); ++j) next.block(2 * i, 2 * j, 2, 2) = p(i, j) * one;
    p = next;
  }
  return p;
}

namespace {

/// 2 over the positive eigenvalues of the symmetric matrix with 1/sqrt(b_m b_(m+1)) beside its diagonal, b_m = 2 m + first.
std::vector<double> pade_roots(int size, int first) {
  Eigen::MatrixXd matrix = Eigen::MatrixXd::Zero(size, size);
  for (int m = 1; m < size; ++m)
    matrix(m - 1, m) = matrix(m, m - 1) = 1 / std::sqrt((2.0 * m + first) * (2.0 * m + 2 + first));
  const Eigen::VectorXd values = Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>(matrix).eigenvalues();
  std::vector<double> roots;
  for (int k = size - 1; k >= 0 && static_cast<int>(roots.size()) < size / 2; --k) roots.push_back(2 / values[k]);
  return roots;
}

}  // namespace

ExponentialSum drude_sum(double eta, double cutoff, double theta, int count) {
  const auto poles = pade_roots(2 * count, 1), zeros = pade_roots(2 * count - 1, 3);
  std::vector<double> weights;
  for (std::size_t j = 0; j < poles.size(); ++j) {
    double weight = 0.5 * count * (2 * count + 3);
    for (std::size_t k = 0; k < poles.size(); ++k) {
      if (k < zeros.size()) weight *= zeros[k] * zeros[k] - poles[j] * poles[j];
      if (k != j) weight /= poles[k] * poles[k] - poles[j] * poles[j];
    }
    weights.push_back(weight);
  }
  const double lambda = std::numbers::pi * eta * cutoff / 2, x = cutoff / theta;
  Complex bose(0.5, 1 / x);  // 1/(1 - e^-z) at z = -i x.
  for (std::size_t j = 0; j < poles.size(); ++j) bose += Complex(0, -2 * weights[j] * x / (poles[j] * poles[j] - x * x));
  ExponentialSum sum;
  const auto add = [&](Complex c, double rate) { sum.terms.push_back({c, std::conj(c), rate}); };
  add(Complex(0, -2 * lambda * cutoff) * bose, cutoff);
  for (std::size_t j = 0; j < poles.size(); ++j) {
    const double rate = poles[j] * theta;
    add(4 * lambda * cutoff * theta * weights[j] * rate / (rate * rate - cutoff * cutoff), rate);
  }
  sum.rest = std::numbers::pi * eta * theta;
  for (const Exponential& term : sum.terms) sum.rest -= (term.coefficient / term.rate).real();
  return sum;
}

ExponentialSum damped_mode(Complex coefficient, Complex partner, Complex rate) {
  if (rate.imag() == 0) return {{{coefficient, std::conj(coefficient), rate}}, 0, 0};
  return {{{coefficient, std::conj(partner), rate}, {partner, std::conj(coefficient), std::conj(rate)}}, 0, 0};
}

Complex first_integral(const ExponentialSum& sum, double t) {
  Complex total = 0;
  for (const Exponential& term : sum.terms) total += term.coefficient * (1.0 - std::exp(-term.rate * t)) / term.rate;
  return total;
}

Complex second_integral(const ExponentialSum& sum, double t) {
  Complex total = 0;
  for (const Exponential& term : sum.terms)
    total += term.coefficient * (t / term.rate - (1.0 - std::exp(-term.rate * t)) / (term.rate * term.rate));
  return total;
}

SystemCoupling constant_coupling(const Eigen::MatrixXcd& matrix) {
  return {[matrix](double, Eigen::MatrixXcd& a) { a = matrix; }, true};
}

OpenSystem one_qubit(double tunnelling, double bias, const ExponentialSum& bath) {
  OpenSystem system;
  system.dimension = 2;
  const Eigen::MatrixXcd hamiltonian = -tunnelling / 2 * pauli('X') - bias / 2 * pauli('Z');
  system.hamiltonian = [hamiltonian](double, double, Eigen::MatrixXcd& h) { h = hamiltonian; };
  system.couplings = {constant_coupling(pauli('Z'))};
  system.baths = {bath};
  return system;
}

Timeline static_run(double duration) {
  Timeline timeline;
  timeline.segments.push_back({0, duration, 0, 0});
  return timeline;
}

std::vector<Density> hierarchy_states(const OpenSystem& system, int depth, const Timeline& timeline, const Density& initial,
                                      const std::vector<double>& times, double tolerance) {
  return states_at(times, timeline, tolerance, [&](const MemoryRun& run, const Visit& visit) {
    const auto counters = propagate_hierarchy(system, depth, run, initial, visit, {});
    if (!counters) FAIL(counters.error().message);
  });
}

}  // namespace tarn::runtime::testing
