#include <catch2/catch.hpp>
#include <cmath>
#include <unsupported/Eigen/KroneckerProduct>

#include "tests/physics/closed/model.h"
#include "tests/support/dense.h"

using namespace tarn;
using namespace tarn::test;

namespace {

struct Rates {
  double down, up, dephasing;  ///< |0><1|, |1><0|, sz [1/ns]
};

/// n qubits alike and apart: H = sum (-d/2 sx - eps(s)/2 sz), eps = from + (to - from) s.
Model noisy(std::size_t n, double d, double from, double to, Rates rates) {
  Model model;
  model.bits = static_cast<std::uint32_t>(2 * n);
  const auto size = Eigen::Index{1} << model.bits;
  model.parts.assign(5, Sparse(size, size));
  for (std::size_t q = 0; q < n; ++q) {
    model.parts[0] += commutator(on('x', q, n));
    model.parts[1] += commutator(on('z', q, n));
    model.parts[2] += dissipator(on('m', q, n));
    model.parts[3] += dissipator(on('p', q, n));
    model.parts[4] += dissipator(on('z', q, n));
  }
  model.coefficients = [=](std::size_t, double s, double, double* rows) {
    rows[0] = -d / 2;
    rows[1] = -(from + (to - from) * s) / 2;
    rows[2] = rates.down;
    rows[3] = rates.up;
    rows[4] = rates.dephasing;
  };
  return model;
}

Dense matrix(const Eigen::VectorXcd& rows) {
  const auto n = static_cast<Eigen::Index>(std::llround(std::sqrt(static_cast<double>(rows.size()))));
  return Eigen::Map<const Dense>(rows.data(), n, n).transpose();
}

Eigen::VectorXcd rows_of(const Dense& rho) {
  const Dense transposed = rho.transpose();
  return Eigen::Map<const Eigen::VectorXcd>(transposed.data(), transposed.size());
}

Dense power(const Dense& rho, std::size_t n) {
  Dense result = rho;
  for (std::size_t q = 1; q < n; ++q) result = Dense(Eigen::kroneckerProduct(result, rho));
  return result;
}

Dense tilted() {
  Dense rho(2, 2);
  rho << 0.3, Complex(0.2, 0.35), Complex(0.2, -0.35), 0.7;
  return rho;
}

}  // namespace

// Textbook: with L = |0><1| at G_dn, |1><0| at G_up and sz at 1/(2 Tphi), the upper population relaxes at
// 1/T1 = G_dn + G_up to G_up T1, the coherence decays at 1/T2 = 1/(2 T1) + 1/Tphi and turns with eps.
TEST_CASE("relaxation and dephasing follow their closed forms") {
  const double t1 = 40, up_share = 0.2, tphi = 25;
  const Rates rates{(1 - up_share) / t1, up_share / t1, 1 / (2 * tphi)};
  const auto check = [&](const Trace& trace, const std::vector<double>& times, double slope, double eps,
                         double margin) {
    for (std::size_t i = 0; i < times.size(); ++i) {
      const double t = times[i], phase = eps * t + slope * t * t / 2;
      const Dense rho = matrix(trace.states[i]);
      CHECK(rho(1, 1).real() == Approx(up_share + (0.7 - up_share) * std::exp(-t / t1)).margin(margin));
      const Complex coherence = Complex(0.2, 0.35) * std::polar(std::exp(-t * (0.5 / t1 + 1 / tphi)), phase);
      CHECK(std::abs(rho(0, 1) - coherence) < margin);
      CHECK(std::abs(rho.trace() - 1.0) < 1e-13);
    }
  };
  const std::vector<double> times = {0, 3, 10.5, 60};
  SECTION("while nothing changes") {
    const runtime::Timeline hold{{{0, 60, 0.5, 0.5}}, 0.5, 0.5};
    check(run_lindblad(noisy(1, 0, 8, 8, rates), hold, tilted(), 1e-10, times), times, 0, 8, 1e-9);
  }
  SECTION("along a ramp of the bias: the phase is its integral") {
    const Model model = noisy(1, 0, 2, 14, rates);
    check(run_lindblad(model, ramp(60), tilted(), 1e-10, times), times, 12.0 / 60, 2, 1e-9);
  }
}

// Qubits apart stay a product of one-qubit solutions, which Eigen 3.4's matrix exponential gives.
TEST_CASE("a register of noisy qubits stays a product") {
  const Rates rates{5e-3, 1e-3, 4e-3};
  const Dense one = noisy(1, 1.7, 2.5, 2.5, rates).generator(0, 0.3, 0);
  for (const std::size_t n : {1u, 2u, 3u, 4u}) {
    const double duration = n == 4 ? 30 : 4000;
    const runtime::Timeline hold{{{0, duration, 0.3, 0.3}}, 0.3, 0.3};
    const Trace trace = run_lindblad(noisy(n, 1.7, 2.5, 2.5, rates), hold, power(tilted(), n), 1e-9,
                                     {duration / 3, duration});
    for (const std::size_t i : {0u, 1u}) {
      const double t = i == 0 ? duration / 3 : duration;
      const Dense expected = power(matrix(exponential_of(t * one) * rows_of(tilted())), n);
      CHECK((matrix(trace.states[i]) - expected).norm() < 5e-9);
    }
    CHECK(trace.counters.exponentials > 0);
  }
}

TEST_CASE("a hold of 100 us with fast phases and slow jumps costs a few exponentials") {
  const Rates rates{1 / 20e3, 0, 1 / 60e3};
  const double eps = 30, duration = 1e5;
  const runtime::Timeline hold{{{0, duration, 0, 0}}, 0, 0};
  std::vector<double> times;
  for (int i = 0; i <= 10; ++i) times.push_back(duration * i / 10);
  for (const std::size_t n : {1u, 3u}) {
    const Trace trace = run_lindblad(noisy(n, 0, eps, eps, rates), hold, power(tilted(), n), 1e-8, times);
    CHECK(trace.counters.exponentials <= 2);
    CHECK(trace.counters.steps == 0);
    const Dense rho = matrix(trace.states.back());
    const double excited = 0.7 * std::exp(-duration / 20e3);
    CHECK(rho(rho.rows() - 1, rho.rows() - 1).real() == Approx(std::pow(excited, n)).margin(1e-12));
    CHECK(std::abs(rho.trace() - 1.0) < 1e-8);
  }
}

TEST_CASE("trace and Hermiticity hold to rounding along a driven anneal, positivity to the tolerance") {
  Model model = noisy(2, 3, 0, 9, {0.03, 0.01, 0.02});
  model.parts.push_back(commutator(Sparse(on('z', 0, 2) * on('z', 1, 2))));
  model.parts.push_back(commutator(on('y', 0, 2)));
  model.reads_t = true;
  const auto plain = model.coefficients;
  model.coefficients = [plain](std::size_t lane, double s, double t, double* rows) {
    plain(lane, s, t, rows);
    rows[0] *= 1 - s;
    rows[5] = 2 * s;
    rows[6] = 0.4 * std::cos(7 * t);
  };
  Dense pure = Dense::Constant(4, 4, 0.25);
  const Trace trace = run_lindblad(model, ramp(40), pure, 1e-8, {0, 10, 20, 30, 40});
  for (const auto& rows : trace.states) {
    const Dense rho = matrix(rows);
    CHECK(std::abs(rho.trace() - 1.0) < 1e-13);
    CHECK((rho - rho.adjoint()).norm() < 1e-13);
    CHECK(dense_levels_of(rho).energies[0] > -1e-7);
  }
}
