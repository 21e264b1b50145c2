// How each equation of fast noise departs from the numerically exact answer as the coupling falls: stationary states of
// one qubit, D = 2, eps = 1.3, Drude bath of cutoff 8 at kT = 1.5 (rad/ns). Reference: the hierarchy, which
// tests/physics/hierarchy holds to closed forms. Orders: second-order equations err by the first order of eta in
// the stationary state (Phys. Rev. E 83, 031117 (2011)), a window that grows as eta^-1/2 by its square root.
#include <Eigen/Dense>
#include <catch2/catch.hpp>

#include "runtime/bath/bath_times.h"
#include "runtime/equation/hierarchy_steady.h"
#include "runtime/generator/stationary.h"
#include "tests/physics/open/open_models.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {

constexpr double kD = 2, kEps = 1.3;

ThermalBath bath_of(double eta) { return *ThermalBath::make({Drude{eta, 8.0}}, 1.5); }

Density exact(double eta) {
  OpenSystem system;
  system.dimension = 2;
  Eigen::MatrixXcd h(2, 2), z(2, 2);
  h << -kEps / 2, -kD / 2, -kD / 2, kEps / 2;
  z << 1, 0, 0, -1;
  system.hamiltonian = [h](double, double, Eigen::MatrixXcd& out) { out = h; };
  system.couplings = {{[z](double, Eigen::MatrixXcd& out) { out = z; }, true}};
  system.baths = {*exponential_sum(bath_of(eta), 1e-7, 200, 60)};
  const auto found = stationary_hierarchy(system, 3, 0, 1e-10, {});
  REQUIRE(found);
  return found->rho;
}

Density stationary(FastEquation equation, double eta) {
  const HamiltonianFamily family = standing_qubit(kD, kEps);
  double window = 0;
  if (equation == FastEquation::coarse_grained) {
    const auto times = bath_times(bath_of(eta), 1000);
    REQUIRE(times);
    window = std::sqrt(times->tau_sb * times->tau_b);
  }
  const auto model = dense_levels<double>(family);
  NoiseTableOptions options;
  options.equation = equation;
  const auto table = NoiseTable::make<double>(model, {fast_bath(equation, bath_of(eta), 6, window)}, options);
  const auto state = stationary_state(map_of(family, table, 0));
  REQUIRE(state);
  return *state;
}

/// Sum of the moduli of the differences.
double off(const Density& a, const Density& b) { return (a - b).cwiseAbs().sum(); }

}  // namespace

TEST_CASE("stationary states against the exact one at two couplings: orders") {
  const double strong = 2e-3, weak = 5e-4;
  const Density strong_exact = exact(strong), weak_exact = exact(weak);
  const auto check = [&](FastEquation equation, double order, double expected) {
    const double here = off(stationary(equation, weak), weak_exact), there = off(stationary(equation, strong), strong_exact);
    CHECK(std::log(there / here) / std::log(strong / weak) == Approx(order).margin(0.06));
    CHECK(here == Approx(expected).epsilon(0.15));
  };
  check(FastEquation::redfield, 1, 1.3e-3);
  check(FastEquation::universal, 1, 8.5e-4);
  check(FastEquation::coarse_grained, 0.5, 5.6e-2);
  // Davies ends at Gibbs' state.
  const auto model = dense_levels<double>(standing_qubit(kD, kEps));
  const auto frame = model.solve(0, 2);
  Eigen::VectorXd p = ((frame.energies[0] - frame.energies.array()) / 1.5).exp();
  p /= p.sum();
  const Density gibbs = (frame.vectors * p.asDiagonal() * frame.vectors.transpose()).cast<std::complex<double>>();
  CHECK(std::log(off(gibbs, strong_exact) / off(gibbs, weak_exact)) / std::log(4.0) == Approx(1).margin(0.05));
  CHECK(off(gibbs, weak_exact) == Approx(9e-4).epsilon(0.15));
}
