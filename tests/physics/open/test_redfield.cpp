// Redfield's equation from tables along s against the double commutator written down once more.
#include <Eigen/Dense>
#include <catch2/catch.hpp>

#include "tests/physics/open/open_models.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;
using tarn::test::product_of;

namespace {

using Complex = std::complex<double>;

ThermalBath drude_bath(double eta) { return *ThermalBath::make({Drude{eta, 8.0}}, kTheta); }

/// The double commutator at one s: -i[H, rho] - sum [A, Lam rho - rho Lam^dagger].
Density brute(const HamiltonianFamily& family, const HalfRangeFunction& gamma, double s, const Density& rho) {
  const auto matrix = [&](const OperatorSum& sum) {
    std::vector<double> row(family.rows);
    family.coefficients({&s, 1}, row.data());
    Density total = Density::Zero(rho.rows(), rho.cols());
    for (const auto& group : sum.groups) total += row[group.coefficient] * dense_matrix<Complex>(group.terms, family.qubits);
    return total;
  };
  const Density h = matrix(family.hamiltonian);
  const auto [e, v] = tarn::test::dense_levels_of(h);
  Density out = -Complex(0, 1) * (product_of(h, rho) - product_of(rho, h));
  for (const OperatorSum& coupling : family.couplings) {
    const Density a = matrix(coupling);
    Density response = product_of(product_of(v.adjoint(), a), v);
    for (Eigen::Index m = 0; m < e.size(); ++m)
      for (Eigen::Index n = 0; n < e.size(); ++n) {
        const double w = e[m] - e[n];
        Complex value;
        gamma({&w, 1}, &value);
        response(n, m) *= value;
      }
    response = product_of(product_of(v, response), v.adjoint());
    const Density inner = product_of(response, rho) - product_of(rho, response.adjoint());
    out -= product_of(a, inner) - product_of(inner, a);
  }
  return out;
}

/// Classical Runge-Kutta of order 4 over a ramp from 0 to 1, twice, extrapolated.
Density brute_ramp(const HamiltonianFamily& family, const HalfRangeFunction& gamma, double duration, const Density& start, int steps) {
  const auto fixed = [&](int count) {
    Density rho = start;
    const double h = duration / count;
    for (int k = 0; k < count; ++k) {
      const double s = static_cast<double>(k) / count, half = 0.5 / count;
      const Density k1 = brute(family, gamma, s, rho), k2 = brute(family, gamma, s + half, rho + h / 2 * k1);
      const Density k3 = brute(family, gamma, s + half, rho + h / 2 * k2), k4 = brute(family, gamma, s + 2 * half, rho + h * k3);
      rho += h / 6 * (k1 + 2 * k2 + 2 * k3 + k4);
    }
    return rho;
  };
  return (16.0 * fixed(2 * steps) - fixed(steps)) / 15.0;
}

Density run_open(const HamiltonianFamily& family, std::shared_ptr<const NoiseTable> table, const Timeline& timeline,
                 const Density& start, double tolerance) {
  const LabOperators lab = lab_of(family);
  OpenGenerator generator(std::move(table), lab);
  const std::vector<double> times{timeline.duration()};
  Density end;
  const auto counters = propagate_open(generator, {&timeline, {}, times, tolerance}, start,
                                       [&](std::size_t, const State& state) { end = std::get<Density>(state); }, {});
  REQUIRE(counters);
  return end;
}

}  // namespace

TEST_CASE("a driven anneal under Redfield's equation, written out, for 1 to 3 qubits") {
  for (const int qubits : {1, 2, 3}) {
    const HamiltonianFamily family = random_chip(qubits, 5, usual_schedules());
    const HalfRangeFunction gamma = half_range_of(drude_bath(2e-3));
    const auto model = dense_levels<double>(family);
    const auto table = NoiseTable::make<double>(model, std::vector<FastBath>(model.couplings, {gamma, nullptr}), {});
    REQUIRE(table);
    CHECK(table->resolved());
    const Density start = ground_state(Track<double>(model, {}), 0);
    const Density expected = brute_ramp(family, gamma, 1.0, start, 400);
    const Density found = run_open(family, table, tarn::runtime::testing::ramp(1.0), start, 1e-10);
    CHECK((found - expected).norm() < 2e-7);
    CHECK(std::abs(found.trace() - 1.0) < 1e-12);
    CHECK((found - found.adjoint()).norm() < 1e-13);
  }
}
