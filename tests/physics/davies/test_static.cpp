// A chip at rest: steady states, decay times, and what every generator must keep.
#include <algorithm>
#include <catch2/catch.hpp>

#include "brute.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;
using tarn::test::dense_levels_of;
using tarn::test::product_of;

namespace {

template <class Scalar>
Density hold(const HamiltonianFamily& family, const std::vector<BathFunctions>& baths, double s, double t, const Density& initial) {
  const auto track = std::make_shared<const Track<Scalar>>(dense_levels<Scalar>(family), TrackOptions{});
  const DaviesTables<Scalar> tables(track, baths);
  const auto answer = refine_to<Scalar>(1e-6, tables, {{{{0, t, s, s}}, s, s}, initial, {t}, {}, {}});
  REQUIRE(answer);
  CHECK(answer->converged);
  return answer->states.front();
}

Density gibbs(const HamiltonianFamily& family, double s, double theta) {
  const auto [energies, vectors] = dense_levels_of(Brute::at(family.hamiltonian, family, s));
  const Eigen::VectorXd weight = (-(energies.array() - energies[0]) / theta).exp();
  return product_of(vectors * (weight / weight.sum()).asDiagonal(), vectors.adjoint());
}

Density mixed_start(Eigen::Index size, unsigned seed) {
  std::mt19937 engine(seed);
  std::normal_distribution<double> normal;
  const Eigen::MatrixXcd root = Eigen::MatrixXcd::NullaryExpr(size, size, [&] { return std::complex<double>(normal(engine), normal(engine)); });
  const Density square = product_of(root, root.adjoint());
  return square / square.trace();
}

/// The map of a hold as a Choi matrix, from the images of |i><j| by linearity.
Density choi(const std::function<Density(const Density&)>& map, Eigen::Index size) {
  Density choi = Density::Zero(size * size, size * size);
  for (Eigen::Index i = 0; i < size; ++i)
    for (Eigen::Index j = 0; j < size; ++j) {
      // |i><j| = combination of four projectors on |i>, |j>, (|i>+|j>), (|i>+i|j>).
      Eigen::VectorXcd x = Eigen::VectorXcd::Unit(size, i), y = Eigen::VectorXcd::Unit(size, j);
      const std::complex<double> unit(0, 1);
      Density image;
      if (i == j) {
        image = map(projector(x));
      } else {
        const Density sum = map(projector(x + y)), turned = map(projector(x + unit * y));
        const Density first = map(projector(x)), second = map(projector(y));
        image = 0.5 * (sum - first - second) + 0.5 * unit * (turned - first - second);
      }
      choi.block(i * size, j * size, size, size) = image;
    }
  return choi;
}

const std::vector<BathFunctions> three(3, {ohmic_rate(2e-2, 30, kTheta), smooth_shift(2e-2, 30)});

}  // namespace

// Commun. Math. Phys. 39, 91 (1974): baths at one temperature leave the Gibbs state alone and lead to it. Where
// barriers are high that takes longer than any hold, so the second is asked at s = 0.3 only.
TEST_CASE("the steady state is the Gibbs state") {
  const std::vector<HamiltonianFamily> chips{random_chip(3, 7, usual_schedules()), frustrated_ring(3), random_chip(3, 8, usual_schedules()),
                                             ising(3, usual_schedules(), {0.2, 0.2, 0.2}, {})};
  for (const auto& family : chips)
    for (const double s : {0.3, 0.55, 0.8, 0.95}) {
      const Density state = gibbs(family, s, kTheta);
      CHECK((hold<double>(family, three, s, 100, state) - state).cwiseAbs().maxCoeff() < 1e-10);
      if (s == 0.3) CHECK((hold<double>(family, three, s, 2e4, mixed_start(8, 5)) - state).cwiseAbs().maxCoeff() < 1e-10);
    }
}

// Quantum Dissipative Systems (World Scientific): 1/T1 = pi alpha (D^2/Om) coth(Om/2 theta) exp(-Om/wc),
// 1/Tphi = 2 pi alpha theta eps^2/Om^2, 1/T2 = 1/(2 T1) + 1/Tphi, alpha = 2 eta.
TEST_CASE("one qubit decays with its T1 and T2") {
  const double d = 2.0, eps = 1.3, eta = 1e-3, alpha = 2 * eta, cutoff = 40, om = std::hypot(d, eps);
  const auto family = ising(1, constant_schedules(d, eps), {-1.0}, {});
  const std::vector<BathFunctions> baths{{ohmic_rate(eta, cutoff, kTheta), {}}};
  const double t1 = 1 / (std::numbers::pi * alpha * d * d / om / std::tanh(om / (2 * kTheta)) * std::exp(-om / cutoff));
  const double t2 = 1 / (0.5 / t1 + kTwoPi * alpha * kTheta * eps * eps / (om * om));
  const Density start = mixed_start(2, 3), steady = gibbs(family, 0.5, kTheta);
  const double t = 100;
  const Density end = hold<double>(family, baths, 0.5, t, start);
  const Density vectors = dense_levels_of(Brute::at(family.hamiltonian, family, 0.5)).vectors;
  const auto level = [&](const Density& rho) -> Density { return product_of(product_of(vectors.adjoint(), rho), vectors); };
  const double left = (level(end)(0, 0) - level(steady)(0, 0)).real() / (level(start)(0, 0) - level(steady)(0, 0)).real();
  CHECK(-t / std::log(left) == Approx(t1).epsilon(1e-9));
  CHECK(-t / std::log(std::abs(level(end)(0, 1) / level(start)(0, 1))) == Approx(t2).epsilon(1e-9));
}

TEST_CASE("a long hold agrees with the equation written down directly") {
  const auto family = frustrated_ring(2);
  const std::vector<BathFunctions> baths{three[0], {ohmic_rate(5e-3, 20, 3.0), smooth_shift(5e-3, 20)}};
  const Density start = mixed_start(4, 9);
  const Density reference = Brute{family, baths}.run({0, 3, 0.6, 0.6}, start, 4000);
  CHECK((hold<double>(family, baths, 0.6, 3, start) - reference).cwiseAbs().maxCoeff() < 1e-8);
}

TEST_CASE("a generator keeps trace and Hermiticity and is completely positive") {
  // Commun. Math. Phys. 48, 119 (1976): completely positive iff the Choi matrix is.
  const auto t = GENERATE(0.05, 20.0);
  const auto family = GENERATE(random_chip(2, 4, usual_schedules()), frustrated_ring(2));
  const std::vector<BathFunctions> baths(2, three[0]);
  const auto map = [&](const Density& rho) { return hold<double>(family, baths, 0.5, t, rho); };
  const Density matrix = choi(map, 4);
  CHECK((matrix - matrix.adjoint()).cwiseAbs().maxCoeff() < 1e-12);
  CHECK(dense_levels_of(matrix).energies.minCoeff() > -1e-12);
  for (Eigen::Index i = 0; i < 4; ++i)
    for (Eigen::Index j = 0; j < 4; ++j) CHECK(std::abs(matrix.block(i * 4, j * 4, 4, 4).trace() - (i == j ? 1.0 : 0.0)) < 1e-12);
}

// Two qubits that do not interact, each with its own bath, cannot know of each other. All their frequencies
// coincide: leaving the groups out would break this.
TEST_CASE("identical free qubits stay a product") {
  const auto pair = ising(2, usual_schedules(), {0.5, 0.5}, {}), one = ising(1, usual_schedules(), {0.5}, {});
  const Density a = mixed_start(2, 1), b = mixed_start(2, 2);
  Density both(4, 4);
  for (Eigen::Index i = 0; i < 4; ++i)
    for (Eigen::Index j = 0; j < 4; ++j) both(i, j) = a(i / 2, j / 2) * b(i % 2, j % 2);
  const BathFunctions bath{ohmic_rate(2e-2, 30, kTheta), {}};
  const Density end = hold<double>(pair, {bath, bath}, 0.4, 25, both);
  const Density left = hold<double>(one, {bath}, 0.4, 25, a), right = hold<double>(one, {bath}, 0.4, 25, b);
  for (Eigen::Index i = 0; i < 4; ++i)
    for (Eigen::Index j = 0; j < 4; ++j) CHECK(std::abs(end(i, j) - left(i / 2, j / 2) * right(i % 2, j % 2)) < 1e-11);
}

TEST_CASE("the basis chosen in a manifold does not matter") {
  const auto family = ising(2, usual_schedules(), {0.5, 0.5}, {});
  auto model = dense_levels<double>(family);
  const auto plain = model;
  model.solve = [plain](double s, Eigen::Index count) {
    auto frame = plain.solve(s, count);
    const Eigen::Vector2d turn(std::cos(1 + 40 * s), std::sin(1 + 40 * s));  // Levels 1 and 2 are degenerate everywhere.
    const Eigen::VectorXd x = frame.vectors.col(1), y = frame.vectors.col(2);
    frame.vectors.col(1) = turn[0] * x + turn[1] * y;
    frame.vectors.col(2) = turn[0] * y - turn[1] * x;
    return frame;
  };
  const DaviesRun run{{{{0, 30, 0, 0.6}, {30, 60, 0.6, 0.6}, {60, 80, 0.6, 0.2}}, 0, 0.2}, mixed_start(4, 6), {45, 80}, {}, {}};
  const std::vector<BathFunctions> baths(2, three[0]);
  std::vector<DaviesPass> passes;
  for (const auto& one : {plain, model}) {
    const DaviesTables<double> tables(std::make_shared<const Track<double>>(one, TrackOptions{}), baths);
    auto answer = davies_pass<double>(tables, run, 2, {});
    REQUIRE(answer);
    passes.push_back(*answer);
  }
  for (std::size_t k = 0; k < 2; ++k) CHECK((passes[0].states[k] - passes[1].states[k]).cwiseAbs().maxCoeff() < 1e-9);
}
