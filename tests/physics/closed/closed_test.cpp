#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "runtime/equation/schroedinger.h"
#include "tests/physics/closed/model.h"
#include "tests/support/dense.h"

using namespace tarn;
using namespace tarn::test;
using Eigen::VectorXcd;

namespace {

/// H = -D/2 sx - eps(s)/2 sz with eps = from + (to - from) s.
Model two_level(double d, double from, double to) {
  Model model;
  model.parts = {closed(on('x', 0, 1)), closed(on('z', 0, 1))};
  model.coefficients = [=](std::size_t, double s, double, double* rows) {
    rows[0] = -d / 2;
    rows[1] = -(from + (to - from) * s) / 2;
  };
  return model;
}

VectorXcd ket(std::initializer_list<Complex> amplitudes) {
  VectorXcd result(static_cast<Eigen::Index>(amplitudes.size()));
  std::copy(amplitudes.begin(), amplitudes.end(), result.begin());
  return result;
}

/// Ring of n spins, H = -g sum X - j sum ZZ with g = 1 - s, j = s in units of `scale`.
Model ring(std::size_t n, double scale) {
  Model model;
  model.bits = static_cast<std::uint32_t>(n);
  Sparse field(1 << n, 1 << n), bonds(1 << n, 1 << n);
  for (std::size_t q = 0; q < n; ++q) {
    field += on('x', q, n);
    bonds += Sparse(on('z', q, n) * on('z', (q + 1) % n, n));
  }
  model.parts = {closed(field), closed(bonds)};
  model.coefficients = [=](std::size_t, double s, double, double* rows) {
    rows[0] = -scale * (1 - s);
    rows[1] = -scale * s;
  };
  return model;
}

}  // namespace

// Rabi's formula, textbook: P(t) = (D^2/Om^2) sin^2(Om t/2), Om^2 = D^2 + eps^2.
TEST_CASE("a static two-level system oscillates as Rabi's formula says") {
  const double d = 2.3, eps = 1.1, omega = std::hypot(d, eps);
  std::vector<double> times;
  for (int i = 0; i <= 40; ++i) times.push_back(0.25 * i);
  const auto check = [&](const Trace& trace, double margin) {
    for (std::size_t i = 0; i < times.size(); ++i) {
      const double expected = std::pow(d / omega * std::sin(omega * times[i] / 2), 2);
      CHECK(std::norm(trace.states[i][1]) == Approx(expected).margin(margin));
    }
  };
  SECTION("as a hold") {
    const runtime::Timeline hold{{{0, 10, 0.5, 0.5}}, 0.5, 0.5};
    check(run_closed(two_level(d, eps, eps), hold, ket({1, 0}), 1e-10, times), 1e-9);
  }
  SECTION("as a ramp that changes nothing, with the interpolant") {
    const Trace trace = run_closed(two_level(d, eps, eps), ramp(10), ket({1, 0}), 1e-10, times);
    check(trace, 1e-9);
    CHECK(trace.counters.steps < 100);
  }
}

// P(diabatic) = exp(-pi D^2/2v) (Proc. R. Soc. A 137, 696 (1932)): D = 1, v = 2.5 gives 0.533488091.
// In adiabatic states the correction of a finite sweep falls as (D v / (v t)^2)^2.
TEST_CASE("a linear sweep obeys the Landau-Zener formula") {
  const double d = 1, v = 2.5, half = 120;
  const Model model = two_level(d, -v * half, v * half);
  const auto lowest = [&](double s) {
    return VectorXcd(dense_levels_of(kI * model.generator(0, s, 0)).vectors.col(0));
  };
  const Trace trace = run_closed(model, ramp(2 * half), lowest(0), 1e-10, {2 * half});
  const double stays = std::norm(lowest(1).dot(trace.states[0]));
  CHECK(1 - stays == Approx(0.533488091).margin(1e-7));
  CHECK(trace.states[0].norm() == Approx(1).margin(1e-9));
}

// Exact at any size (Phys. Rev. Lett. 95, 245701 (2005)): from the ground state at J = 0 the ring
// factorises into two-level problems H_k = 2 (g - J cos k) sz + 2 J sin k sx, k = (2m + 1) pi/n > 0,
// whose excitations p_k give the population prod (1 - p_k) and the mean number of defects 2 sum p_k.
TEST_CASE("a ring of ten spins anneals as its two-level problems do") {
  const std::size_t n = 10;
  const double scale = 2, duration = 12;
  double population = 1, defects = 0;
  for (std::size_t m = 0; m < n / 2; ++m) {
    const double k = (2.0 * static_cast<double>(m) + 1) * std::numbers::pi / static_cast<double>(n);
    Model pair;
    pair.parts = {closed(on('z', 0, 1)), closed(on('x', 0, 1))};
    pair.coefficients = [=](std::size_t, double s, double, double* rows) {
      rows[0] = 2 * scale * ((1 - s) - s * std::cos(k));
      rows[1] = 2 * scale * s * std::sin(k);
    };
    const Trace trace = run_closed(pair, ramp(duration), ket({0, 1}), 1e-12, {duration});
    const VectorXcd lowest = dense_levels_of(kI * pair.generator(0, 1, 0)).vectors.col(0);
    const double p = 1 - std::norm(lowest.dot(trace.states[0]));
    population *= 1 - p;
    defects += 2 * p;
  }
  const Model model = ring(n, scale);
  const VectorXcd plus = VectorXcd::Constant(1 << n, std::pow(2.0, -0.5 * static_cast<double>(n)));
  const Trace trace = run_closed(model, ramp(duration), plus, 1e-10, {duration});
  const VectorXcd& psi = trace.states[0];
  const double aligned = std::norm(psi[0]) + std::norm(psi[(1 << n) - 1]);
  const VectorXcd bonds = kI * (model.parts[1] * psi);
  const double found = (static_cast<double>(n) - psi.dot(bonds).real()) / 2;
  CHECK(population > 0.2);
  CHECK(population < 0.98);
  CHECK(aligned == Approx(population).margin(1e-9));
  CHECK(found == Approx(defects).margin(1e-8));
  CHECK(trace.counters.evaluations < 5000);
}

// Against Eigen 3.4's matrix exponential.
TEST_CASE("holds of every size agree with a matrix exponential") {
  for (const std::size_t n : {2u, 4u, 5u, 7u, 8u}) {
    const Model model = ring(n, 1.5);
    VectorXcd start = VectorXcd::Zero(1 << n);
    start[1] = 0.6;
    start[2] = Complex(0, 0.8);
    const runtime::Timeline hold{{{0, 19, 0.4, 0.4}}, 0.4, 0.4};
    const Trace trace = run_closed(model, hold, start, 1e-9, {0, 3.5, 19});
    const Dense g = model.generator(0, 0.4, 0);
    CHECK((trace.states[0] - start).norm() == 0);
    CHECK((trace.states[1] - exponential_of(3.5 * g) * start).norm() < 5e-9);
    CHECK((trace.states[2] - exponential_of(19 * g) * start).norm() < 5e-9);
    CHECK(trace.counters.exponentials + trace.counters.decompositions > 0);
  }
}

TEST_CASE("a hold of 100 us costs one decomposition and keeps its phases") {
  const double eps = 30, duration = 1e5;
  const runtime::Timeline hold{{{0, duration, 0, 0}}, 0, 0};
  const VectorXcd start = ket({std::sqrt(0.5), std::sqrt(0.5)});
  const Trace trace = run_closed(two_level(0, eps, eps), hold, start, 1e-8, {duration});
  // Amplitudes turn as exp(+-i eps t/2); 1.5e6 rad leave 1e-9 of a radian.
  CHECK(std::abs(trace.states[0][0] - std::polar(std::sqrt(0.5), eps * duration / 2)) < 2e-9);
  CHECK(trace.counters.decompositions == 1);
  CHECK(trace.counters.steps == 0);
}

TEST_CASE("a sudden step leaves the state, a kink is a boundary of steps") {
  Model model = two_level(1.5, 0, 0);
  SECTION("two holds with a step between them are two exponentials") {
    model.coefficients = [](std::size_t, double s, double, double* rows) {
      rows[0] = s < 0.5 ? 1 : 0;
      rows[1] = s < 0.5 ? 0 : 1;
    };
    const runtime::Timeline steps{{{0, 22, 0.2, 0.2}, {22, 55, 0.8, 0.8}}, 0.2, 0.8};
    const Trace trace = run_closed(model, steps, ket({1, 0}), 1e-10, {22, 55});
    // exp(-i 22 sx), then exp(-i 33 sz).
    CHECK(std::abs(trace.states[0][0] - std::cos(22.0)) < 1e-12);
    CHECK(std::abs(trace.states[0][1] + kI * std::sin(22.0)) < 1e-12);
    CHECK(std::abs(trace.states[1][0] - std::polar(std::cos(22.0), -33.0)) < 1e-12);
    CHECK(std::abs(trace.states[1][1] + kI * std::polar(std::sin(22.0), 33.0)) < 1e-12);
    CHECK(trace.counters.decompositions == 2);
  }
  SECTION("a jump of a schedule inside a ramp costs nothing when it is a break") {
    model.coefficients = [](std::size_t, double s, double, double* rows) {
      rows[0] = s < 0.25 ? 1 : 0;
      rows[1] = s < 0.25 ? 0 : 1;
    };
    const Trace trace = run_closed(model, ramp(8), ket({1, 0}), 1e-10, {8}, {2});
    CHECK(std::abs(trace.states[0][0] - std::polar(std::cos(2.0), -6.0)) < 1e-9);
    CHECK(trace.counters.rejected <= 2);
    const Trace blind = run_closed(model, ramp(8), ket({1, 0}), 1e-10, {8});
    CHECK(blind.counters.rejected > 5);
    CHECK((blind.states[0] - trace.states[0]).norm() < 1e-8);
  }
}

TEST_CASE("errors say what happened and when") {
  Model model = two_level(1, 0, 1);
  model.coefficients = [](std::size_t, double s, double, double* rows) {
    rows[0] = 1;
    rows[1] = s > 0.5 ? std::numeric_limits<double>::quiet_NaN() : 0;
  };
  const runtime::Timeline timeline = ramp(10);
  const std::vector<double> times = {10};
  const runtime::LinearRun run{&timeline, {}, times, 1e-8};
  const auto ignore = [](std::size_t, const runtime::State&) {};
  const runtime::Ket start = ket({1, 0});
  const auto failed = propagate_schroedinger(model.entries(), model.block(), run, start, ignore, {});
  REQUIRE(!failed);
  CHECK(failed.error().kind == "not_finite");
  const auto stopped = propagate_schroedinger(two_level(1, 0, 1).entries(), model.block(), run, start,
                                              ignore, [] { return true; });
  REQUIRE(!stopped);
  CHECK(stopped.error().kind == "interrupted");
}
