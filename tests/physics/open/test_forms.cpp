// What each fast-noise generator is bound to: positivity, trace, relaxation times, stationary states.
#include <Eigen/Dense>
#include <catch2/catch.hpp>

#include "runtime/generator/stationary.h"
#include "tests/physics/open/open_models.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {

using Complex = std::complex<double>;

ThermalBath ohmic(double eta) { return *ThermalBath::make({PowerLaw{eta, kTwoPi * 8, 1.0}}, kTheta); }
ThermalBath drude(double eta) { return *ThermalBath::make({Drude{eta, 8.0}}, 1.5); }

std::shared_ptr<const NoiseTable> table_of(const HamiltonianFamily& family, FastEquation equation, const ThermalBath& bath, double window = 0, double width = 200) {
  const auto model = dense_levels<double>(family);
  NoiseTableOptions options;
  options.equation = equation;
  return NoiseTable::make<double>(model, std::vector<FastBath>(model.couplings, fast_bath(equation, bath, width, window)), options);
}

/// Smallest eigenvalue of the Choi matrix of a generator, projected off the maximally entangled state: it is not
/// negative where the generator has Lindblad form. Source: Commun. Math. Phys. 48, 119 (1976).
double smallest_choi(const Eigen::MatrixXcd& map) {
  const auto n = static_cast<Eigen::Index>(std::llround(std::sqrt(static_cast<double>(map.rows()))));
  Eigen::MatrixXcd choi(n * n, n * n);
  for (Eigen::Index i = 0; i < n; ++i)
    for (Eigen::Index j = 0; j < n; ++j)
      for (Eigen::Index k = 0; k < n; ++k)
        for (Eigen::Index l = 0; l < n; ++l) choi(i + n * k, j + n * l) = map(i + n * j, k + n * l);
  Eigen::VectorXcd entangled = Eigen::VectorXcd::Zero(n * n);
  for (Eigen::Index i = 0; i < n; ++i) entangled[i * (n + 1)] = 1 / std::sqrt(static_cast<double>(n));
  const Eigen::MatrixXcd off = Eigen::MatrixXcd::Identity(n * n, n * n) - entangled * entangled.adjoint();
  const Eigen::MatrixXcd projected = off * choi * off;
  return tarn::test::dense_levels_of(0.5 * (projected + projected.adjoint())).energies[0];
}

Density gibbs(const HamiltonianFamily& family, double s, double theta) {
  const auto model = dense_levels<double>(family);
  const auto frame = model.solve(s, model.dimension);
  Eigen::VectorXd p = ((frame.energies[0] - frame.energies.array()) / theta).exp();
  p /= p.sum();
  return (frame.vectors * p.asDiagonal() * frame.vectors.transpose()).cast<Complex>();
}

}  // namespace

// Row 10 of the published checks: Commun. Math. Phys. 48, 119 (1976).
TEST_CASE("universal and coarse-grained generators have Lindblad form, Redfield's has not") {
  for (const unsigned seed : {1U, 2U, 3U}) {
    const HamiltonianFamily family = random_chip(2, seed, usual_schedules());
    CHECK(smallest_choi(map_of(family, table_of(family, FastEquation::universal, ohmic(1e-3)), 0.55)) > -1e-12);
    CHECK(smallest_choi(map_of(family, table_of(family, FastEquation::coarse_grained, ohmic(1e-3), 0.8), 0.55)) > -1e-12);
    CHECK(smallest_choi(map_of(family, table_of(family, FastEquation::redfield, ohmic(1e-3)), 0.55)) < -1e-4);
  }
}

TEST_CASE("every generator keeps the trace and Hermiticity to rounding") {
  const HamiltonianFamily family = random_chip(2, 4, usual_schedules());
  for (const FastEquation equation : {FastEquation::redfield, FastEquation::universal, FastEquation::coarse_grained}) {
    const Eigen::MatrixXcd map = map_of(family, table_of(family, equation, ohmic(1e-3), 0.8), 0.4);
    Eigen::RowVectorXcd trace = Eigen::RowVectorXcd::Zero(16);
    for (Eigen::Index i = 0; i < 4; ++i) trace[5 * i] = 1;
    // The parts are read off polynomials along s, good to 1e-9 of the largest.
    CHECK((trace * map).cwiseAbs().maxCoeff() < 1e-8);
    const Density rho = gibbs(family, 0.4, 3.0);
    const Eigen::VectorXcd image = map * rho.reshaped();
    const Density out = image.reshaped(4, 4);
    CHECK((out - out.adjoint()).norm() < 1e-13 * out.norm() + 1e-14);
  }
}

// 1/T1 = (D/Om)^2 [gamma(Om) + gamma(-Om)], 1/T2 = 1/(2 T1) + 2 (eps/Om)^2 gamma(0): Quantum Dissipative Systems
// (World Scientific); beyond weak coupling they hold to first order in eta.
TEST_CASE("relaxation times of a weakly coupled qubit") {
  const double d = 2, eps = 1.3, om = std::hypot(d, eps), eta = 1e-6;
  const HamiltonianFamily family = standing_qubit(d, eps);
  const ThermalBath bath = drude(eta);
  const Eigen::Array3d w(om, -om, 0);
  const Eigen::ArrayXd gamma = bath.rate(w);
  const double t1 = 1 / (d * d / om / om * (gamma[0] + gamma[1]));
  const double t2 = 1 / (0.5 / t1 + 2 * eps * eps / om / om * gamma[2]);
  const auto frame = dense_levels<double>(family).solve(0, 2);
  const Eigen::MatrixXcd v = frame.vectors.cast<Complex>();
  const Density difference = v.col(1) * v.col(1).adjoint() - v.col(0) * v.col(0).adjoint(), coherence = v.col(0) * v.col(1).adjoint();
  // The window heats, by as much as 1/100 ns is against the rates of the bath.
  for (const FastEquation equation : {FastEquation::redfield, FastEquation::universal, FastEquation::coarse_grained}) {
    const Eigen::MatrixXcd map = map_of(family, table_of(family, equation, bath, equation == FastEquation::coarse_grained ? 100.0 : 0.0, 4), 0);
    const double tolerance = equation == FastEquation::coarse_grained ? 5e-3 : 1e-4;
    const auto relaxation = leading_mode(map, difference.reshaped()), dephasing = leading_mode(map, coherence.reshaped());
    REQUIRE(relaxation);
    REQUIRE(dephasing);
    CHECK(1 / relaxation->rate == Approx(t1).epsilon(tolerance));
    CHECK(1 / dephasing->rate == Approx(t2).epsilon(tolerance));
    CHECK(relaxation->share > 0.99);
  }
}

// Redfield and universal end at the Gibbs state up to the first order of the coupling; a window heats by more.
TEST_CASE("stationary states come to Gibbs' as the coupling falls") {
  const HamiltonianFamily family = standing_qubit(2, 1.3);
  for (const FastEquation equation : {FastEquation::redfield, FastEquation::universal}) {
    std::vector<double> off;
    for (const double eta : {2e-3, 5e-4}) {
      const auto state = stationary_state(map_of(family, table_of(family, equation, drude(eta)), 0));
      REQUIRE(state);
      CHECK(std::abs(state->trace() - 1.0) < 1e-12);
      off.push_back((*state - gibbs(family, 0, 1.5)).norm());
    }
    CHECK(std::log(off[0] / off[1]) / std::log(4.0) == Approx(1).margin(0.05));
    CHECK(off[1] < 3e-3);
  }
}
