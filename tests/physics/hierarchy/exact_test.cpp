// The hierarchy against cases whose answer is known.
#include <Eigen/Core>
#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "memory_models.h"
#include "runtime/equation/hierarchy.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;
using Complex = std::complex<double>;

namespace {

Density plus_state() { return Density::Constant(2, 2, 0.5); }

Density up_state() {
  Density up = Density::Zero(2, 2);
  up(0, 0) = 1;
  return up;
}

double mean_z(const Density& rho) { return (rho(0, 0) - rho(1, 1)).real(); }

}  // namespace

// Source: the closed form of the matrix exponential, by Eigen 3.4 (unsupported/MatrixFunctions).
TEST_CASE("without a bath a hierarchy is the closed system") {
  OpenSystem system = one_qubit(2, 1.3, drude_sum(0, 8, 1.5, 2));
  const auto states = hierarchy_states(system, 3, static_run(5), up_state(), {0, 1, 5}, 1e-11);
  Eigen::MatrixXcd h;
  system.hamiltonian(0, 0, h);
  for (const auto& [k, t] : {std::pair{1, 1.0}, std::pair{2, 5.0}}) {
    const Eigen::MatrixXcd u = tarn::test::exponential_of(Complex(0, -t) * h);
    const auto at = static_cast<std::size_t>(k);
    CHECK((states[at] - tarn::test::product_of(tarn::test::product_of(u, up_state()), u.adjoint())).norm() < 1e-9);
  }
  CHECK((states[0] - up_state()).norm() == 0);
}

// Pure dephasing: |rho_01| falls as exp(-Q2), Q2 = 4 int_0^t (t - t') Re C, without a phase; The Theory of Open
// Quantum Systems (Oxford, 2002). Of a sum of exponentials Q2 is a closed form.
TEST_CASE("pure dephasing by a sum of exponentials") {
  ExponentialSum bath = drude_sum(0.02, 5, 1.5, 3);
  SECTION("Drude") {}
  SECTION("a damped mode") { bath = damped_mode({0.3, 0.05}, {0.2, -0.02}, {0.8, 2.5}); }
  const double bias = 1.3;
  const std::vector<double> times = {0.3, 1, 2.5};
  const auto states = hierarchy_states(one_qubit(0, bias, bath), 14, static_run(2.5), plus_state(), times, 1e-11);
  for (std::size_t k = 0; k < times.size(); ++k) {
    const double t = times[k], q2 = 4 * (second_integral(bath, t).real() + bath.rest * t);
    const Complex expected = 0.5 * std::exp(Complex(-q2, bias * t));
    CHECK(std::abs(states[k](0, 1) - expected) < 1e-7);
    CHECK(states[k](0, 0).real() == Approx(0.5).epsilon(1e-13));
  }
}

// The exact Q2 of an Ohmic density with a Drude cutoff by Matsubara's sum, 200000 terms: textbook, no source.
TEST_CASE("the Drude sum converges to its bath") {
  const double eta = 0.02, cutoff = 5, theta = 1.5, t = 2;
  const ExponentialSum few = drude_sum(eta, cutoff, theta, 6);
  const double lambda = std::numbers::pi * eta * cutoff / 2;
  ExponentialSum many;
  many.terms.push_back({lambda * cutoff * Complex(1 / std::tan(cutoff / (2 * theta)), -1), 0, cutoff});
  for (int k = 1; k <= 200000; ++k) {
    const double rate = 2 * std::numbers::pi * k * theta;
    many.terms.push_back({4 * lambda * cutoff * theta * rate / (rate * rate - cutoff * cutoff), 0, rate});
  }
  const double exact = 4 * second_integral(many, t).real();
  CHECK(4 * (second_integral(few, t).real() + few.rest * t) == Approx(exact).epsilon(2e-4));
}

// alpha = 1/2 without bias: P(t) falls as exp(-g t), g = pi D^2 / (2 wc), a Drude cutoff counting e^0.5772 times an exponential
// one: Rev. Mod. Phys. 59, 1 (1987). The slope is that once t is long against 1/wc; corrections are of order g/wc and kT/wc.
TEST_CASE("damping at the point alpha = 1/2") {
  const double tunnelling = 1;
  const auto slope = [&](double cutoff, int count) {
    const OpenSystem system = one_qubit(tunnelling, 0, drude_sum(0.25, cutoff, 1, count));
    const auto states = hierarchy_states(system, 6, static_run(8), up_state(), {4, 8}, 1e-7);
    return std::log(mean_z(states[0]) / mean_z(states[1])) / 4;
  };
  const auto limit = [&](double cutoff) {
    return std::numbers::pi * tunnelling * tunnelling / (2 * cutoff * std::exp(0.57721566));
  };
  CHECK(slope(15, 5) == Approx(limit(15)).epsilon(0.015));
  CHECK(slope(30, 6) == Approx(limit(30)).epsilon(0.01));
}
