// The second-order equation that follows the drive.
#include <Eigen/Core>
#include <catch2/catch.hpp>
#include <cmath>
#include <vector>

#include "memory_models.h"
#include "runtime/equation/driven_redfield.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;
using Complex = std::complex<double>;

namespace {

std::vector<Density> driven_states(const OpenSystem& system, const Timeline& timeline, const Density& initial,
                                   const std::vector<double>& times, StartingMemory memory = StartingMemory::none,
                                   double tolerance = 1e-11) {
  return states_at(times, timeline, tolerance, [&](const MemoryRun& run, const Visit& visit) {
    const auto counters = propagate_driven_redfield(system, run, initial, memory, visit, {});
    if (!counters) FAIL(counters.error().message);
  });
}

/// Redfield's equation of a static one-qubit system written out: Lam_nm = A_nm Gamma_t(E_m - E_n) in the eigenbasis,
/// Gamma_t(w) = int_0^t exp(i w x) C(x) dx by Simpson's rule, d rho/dt by the classical method of order 4. IBM J.
/// Res. Dev. 1, 19 (1957). `until` the integral stops there (long times: Markov).
Density redfield_by_quadrature(const OpenSystem& system, const Density& initial, double end, int steps, double until) {
  Eigen::MatrixXcd h(2, 2), a(2, 2);
  system.hamiltonian(0, 0, h);
  system.couplings[0].at(0, a);
  const auto levels = tarn::test::dense_levels_of(h);
  const Eigen::MatrixXcd& v = levels.vectors;
  const Eigen::MatrixXcd turned = v.adjoint() * a * v;
  const ExponentialSum& bath = system.baths[0];
  const auto integrand = [&](double w, double x) {
    Complex c = 0;
    for (const Exponential& term : bath.terms) c += term.coefficient * std::exp(-term.rate * x);
    return std::exp(Complex(0, w * x)) * c;
  };
  // Gamma_t at every half step, from four panels each.
  const double half = end / (2 * steps);
  const auto pairs = static_cast<std::size_t>(2 * steps + 1);
  std::vector<Eigen::MatrixXcd> lam(pairs, Eigen::MatrixXcd::Zero(2, 2));
  for (Eigen::Index n = 0; n < 2; ++n)
    for (Eigen::Index m = 0; m < 2; ++m) {
      const double w = levels.energies[m] - levels.energies[n];
      Complex gamma = bath.rest;
      const auto grow = [&](double from, double to) {
        const int panels = 8;
        const double d = (to - from) / panels;
        for (int p = 0; p < panels; ++p) {
          const double x = from + p * d;
          gamma += d / 6 * (integrand(w, x) + 4.0 * integrand(w, x + d / 2) + integrand(w, x + d));
        }
      };
      if (until > 0)
        for (int p = 0; p < 2000; ++p) grow(until * p / 2000, until * (p + 1) / 2000);
      for (std::size_t k = 0; k < pairs; ++k) {
        lam[k](n, m) = turned(n, m) * gamma;
        if (until == 0) grow(half * static_cast<double>(k), half * static_cast<double>(k + 1));
      }
    }
  Eigen::MatrixXcd rho = v.adjoint() * initial * v;
  const Eigen::MatrixXcd e = levels.energies.cast<Complex>().asDiagonal();
  const auto slope = [&](std::size_t k, const Eigen::MatrixXcd& x) {
    const Eigen::MatrixXcd inner = lam[k] * x - x * lam[k].adjoint();
    return Eigen::MatrixXcd(Complex(0, -1) * (e * x - x * e) - turned * inner + inner * turned);
  };
  for (std::size_t k = 0; k + 2 < pairs; k += 2) {
    const double step = 2 * half;
    const Eigen::MatrixXcd k1 = slope(k, rho), k2 = slope(k + 1, rho + step / 2 * k1), k3 = slope(k + 1, rho + step / 2 * k2),
                           k4 = slope(k + 2, rho + step * k3);
    rho += step / 6 * (k1 + 2 * k2 + 2 * k3 + k4);
  }
  return v * rho * v.adjoint();
}

Density invented_start() {
  Density rho(2, 2);
  rho << 0.7, Complex(0.2, 0.3), Complex(0.2, -0.3), 0.3;
  return rho;
}

ExponentialSum damped_bath() {
  ExponentialSum bath = damped_mode({0.1, 0.05}, {0.08, -0.02}, {0.8, 2.5});
  bath.terms.push_back({{0.15, -0.1}, {0.15, 0.1}, 1.7});
  bath.rest = 0.02;
  return bath;
}

}  // namespace

TEST_CASE("driven Redfield, static: the integral up to t by quadrature") {
  const OpenSystem system = one_qubit(2, 1.3, damped_bath());
  const auto states = driven_states(system, static_run(3), invented_start(), {3});
  CHECK((states[0] - redfield_by_quadrature(system, invented_start(), 3, 1500, 0)).norm() < 1e-8);
  CHECK(std::abs(states[0].trace() - 1.0) < 1e-13);
  CHECK((states[0] - states[0].adjoint()).norm() < 1e-13);
}

TEST_CASE("driven Redfield with settled baths is Redfield's equation of long times") {
  const OpenSystem system = one_qubit(2, 1.3, damped_bath());
  const auto states = driven_states(system, static_run(3), invented_start(), {3}, StartingMemory::settled);
  CHECK((states[0] - redfield_by_quadrature(system, invented_start(), 3, 1500, 40)).norm() < 1e-8);
}

// Second order is exact as the coupling goes to zero: the distance to the hierarchy falls as its square.
TEST_CASE("driven Redfield meets the hierarchy to second order, along a ramp") {
  const auto distance = [](double strength) {
    OpenSystem system = one_qubit(0, 0, drude_sum(strength, 4, 1.5, 2));
    system.hamiltonian = [](double s, double, Eigen::MatrixXcd& h) {
      h = -1.5 * (1 - s) * pauli('X') - 4 * (s - 0.5) * pauli('Z');
    };
    Timeline timeline;
    timeline.segments = {{0, 3, 0, 1}};
    const auto exact = hierarchy_states(system, 6, timeline, invented_start(), {3}, 1e-12);
    return (driven_states(system, timeline, invented_start(), {3})[0] - exact[0]).norm();
  };
  const double coarse = distance(2e-3), fine = distance(1e-3);
  CHECK(coarse < 1e-3);
  CHECK(coarse / fine == Approx(4).epsilon(0.05));
}

// Pure dephasing is second order exactly: as in exact_test.cpp.
TEST_CASE("driven Redfield, pure dephasing") {
  const ExponentialSum bath = damped_bath();
  const double t = 2, q2 = 4 * (second_integral(bath, t).real() + bath.rest * t);
  const auto states = driven_states(one_qubit(0, 1.3, bath), static_run(t), Density::Constant(2, 2, 0.5), {t});
  CHECK(std::abs(states[0](0, 1) - 0.5 * std::exp(Complex(-q2, 1.3 * t))) < 1e-9);
}

// Two qubits without a bond, one of them without a bath but with a jump: products of what each does alone.
TEST_CASE("driven Redfield, jumps and two qubits") {
  OpenSystem both;
  both.dimension = 4;
  both.hamiltonian = [](double, double, Eigen::MatrixXcd& h) {
    h = -pauli_word("XI") - 0.65 * pauli_word("ZI") - 0.4 * pauli_word("IZ");
  };
  both.couplings = {constant_coupling(pauli_word("ZI"))};
  both.baths = {damped_bath()};
  Eigen::MatrixXcd lower = Eigen::MatrixXcd::Zero(4, 4);
  lower(0, 1) = lower(2, 3) = std::sqrt(0.3);
  both.jumps = {lower};
  Density initial = Density::Zero(4, 4);
  initial.topLeftCorner(2, 2) = 0.7 * Density::Constant(2, 2, 0.5);
  initial.bottomRightCorner(2, 2) = 0.3 * Density::Constant(2, 2, 0.5);
  const double t = 1.7;
  const auto joint = driven_states(both, static_run(t), initial, {t});
  Density first = Density::Zero(2, 2);
  first(0, 0) = 0.7;
  first(1, 1) = 0.3;
  const auto left = driven_states(one_qubit(2, 1.3, damped_bath()), static_run(t), first, {t});
  Density right(2, 2);  // Decay at rate 0.3 to the first state, H = -0.4 Z: closed form.
  right(1, 1) = 0.5 * std::exp(-0.3 * t);
  right(0, 0) = 1.0 - right(1, 1);
  right(0, 1) = 0.5 * std::exp(Complex(-0.15, 0.8) * t);
  right(1, 0) = std::conj(right(0, 1));
  Density product(4, 4);
  for (Eigen::Index i = 0; i < 2; ++i)
    for (Eigen::Index j = 0; j < 2; ++j) product.block(2 * i, 2 * j, 2, 2) = left[0](i, j) * right;
  CHECK((joint[0] - product).norm() < 1e-9);
}
