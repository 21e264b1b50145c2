// Trajectories against the density matrix of the same equation, which other code computes in another way.
#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/trajectories/sample.h"
#include "tests/physics/trajectories/trajectory_models.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

/// 1 or 2 qubits from a state far from equilibrium along the mixed pace.
NoisyRun chip_on_pace(int qubits, unsigned seed) {
  Ket start(Index{1} << qubits);
  for (Index k = 0; k < start.size(); ++k) start[k] = std::polar(1.0 + static_cast<double>(k), 1.3 * static_cast<double>(k * k));
  return {random_chip(qubits, seed, usual_schedules()), mixed_pace(), {0.4, 1.3, 4.5, 6}, {start.normalized()}};
}

MatrixSum decay_of_first(int qubits, double rate) {
  const Index n = Index{1} << qubits;
  MatrixSum jump{{2}, {Density::Zero(n, n)}};
  for (Index k = 0; k < n / 2; ++k) jump.matrices[0](k, k + n / 2) = std::sqrt(rate);
  return jump;
}

/// A chi-square has variance twice its degrees of freedom.
void check_chi_square(const Eigen::MatrixXd& readings, const Eigen::RowVectorXd& expected, double least) {
  const ChiSquare found = chi_square(readings, expected);
  const auto freedom = static_cast<double>(found.freedom);
  INFO("chi-square " << found.value << " for " << freedom);
  CHECK(freedom >= least);
  CHECK(found.value < freedom + 3.5 * std::sqrt(2 * freedom));
  CHECK(found.value > freedom - 3.5 * std::sqrt(2 * freedom));
}

}  // namespace

TEST_CASE("rates of jumps add up to what the norm loses") {
  NoisyRun run = chip_on_pace(2, 3);
  run.jumps = {decay_of_first(2, 0.2)};
  NoisyRun alike = run;
  alike.family = ising(2, usual_schedules(), {0.3, 0.3}, {});
  Ket psi = Ket::Random(4);
  psi.normalize();
  for (const Unravelling& model :
       {unravel_fast_noise(operators_table(run, FastEquation::universal, 2e-3), lab_with_jumps(run), false),
        unravel_fast_noise(operators_table(run, FastEquation::coarse_grained, 2e-3, 0.5), lab_with_jumps(run), false),
        davies_unravelling(run, 1e-3), davies_unravelling(alike, 1e-3)}) {
    for (const double s : {0.0, 0.4, 0.93}) {
      Eigen::MatrixXcd drift;
      JumpImages jumps;
      REQUIRE(model.drift(s, 0, drift));
      model.jumps(s, 0, psi, jumps);
      const double lost = -2 * psi.dot(drift * psi).real();
      CHECK(lost > 0.1);
      // Tables are good to 1e-9 of their largest element.
      CHECK(jumps.images.squaredNorm() == Approx(lost).epsilon(1e-6));
    }
  }
}

TEST_CASE("the universal equation: trajectories agree with the density matrix within their error") {
  for (const int qubits : {1, 2}) {
    NoisyRun run = chip_on_pace(qubits, 11);
    if (qubits == 1) run.jumps = {decay_of_first(1, 0.3)};
    const auto table = operators_table(run, FastEquation::universal, 2e-3);
    const Unravelling model = unravel_fast_noise(table, lab_with_jumps(run), false);
    check_chi_square(readings_of(model, run, 3000, 1), readings_of(density_by_open(run, table), qubits), 4.0 * qubits);
  }
}

TEST_CASE("the coarse-grained equation: trajectories agree with the density matrix within their error") {
  for (const int qubits : {1, 2}) {
    const NoisyRun run = chip_on_pace(qubits, 12);
    const auto table = operators_table(run, FastEquation::coarse_grained, 2e-3, 0.5);
    const Unravelling model = unravel_fast_noise(table, lab_with_jumps(run), false);
    check_chi_square(readings_of(model, run, 3000, 2), readings_of(density_by_open(run, table), qubits), 4.0 * qubits);
  }
}

TEST_CASE("Davies' equation: trajectories agree with the density matrix within their error") {
  for (const int kind : {1, 2, 3}) {
    NoisyRun run = chip_on_pace(std::min(kind, 2), 13);
    // Two qubits of one frequency: their jumps add up before they are squared.
    if (kind == 3) run.family = ising(2, usual_schedules(), {0.3, 0.3}, {});
    check_chi_square(readings_of(davies_unravelling(run, 2e-3), run, 800, 3), readings_of(density_by_davies(run, 2e-3), run.family.qubits), 4.0 * run.family.qubits);
  }
}

TEST_CASE("Davies' drift from a table is the drift") {
  NoisyRun run = chip_on_pace(2, 13);
  const Unravelling made = davies_unravelling(run, 2e-3, true), exact = davies_unravelling(run, 2e-3);
  Eigen::MatrixXcd from_table, drift;
  for (const double s : {0.0, 0.13, 0.5, 0.77, 1.0}) {
    REQUIRE(made.drift(s, 0, from_table));
    REQUIRE(exact.drift(s, 0, drift));
    CHECK((from_table - drift).cwiseAbs().maxCoeff() < 1e-7);
  }
  CHECK((readings_of(made, run, 20, 4) - readings_of(exact, run, 20, 4)).cwiseAbs().maxCoeff() < 1e-5);
}

// Row by row the same numbers: nothing about the number of threads may show.
TEST_CASE("trajectories are the same bits for 1, 2 and 5 jobs, and for more trajectories") {
  NoisyRun run = chip_on_pace(2, 14);
  const Unravelling model = unravel_fast_noise(operators_table(run, FastEquation::universal, 2e-3), lab_with_jumps(run), false);
  const Eigen::MatrixXd one = readings_of(model, run, 50, 5, 1);
  CHECK(readings_of(model, run, 50, 5, 2) == one);
  CHECK(readings_of(model, run, 50, 5, 5) == one);
  CHECK(readings_of(model, run, 70, 5, 1).topRows(50) == one);
  CHECK(readings_of(model, run, 50, 6, 1) != one);
}

TEST_CASE("a trajectory is a pure state of norm 1, and its own whatever the tolerance") {
  const NoisyRun run = chip_on_pace(2, 15);
  const Unravelling model = unravel_fast_noise(operators_table(run, FastEquation::universal, 2e-3), lab_with_jumps(run), false);
  const Eigen::MatrixXd fine = readings_of(model, run, 40, 6, 1, 1e-10), coarse = readings_of(model, run, 40, 6, 1, 1e-7);
  const Index words = 15;
  // The squared means of all words of a pure state of n qubits add up to 2^n - 1.
  for (Index at = 0; at < fine.cols(); at += words)
    CHECK((fine.middleCols(at, words).rowwise().squaredNorm().array() - 3).abs().maxCoeff() < 1e-12);
  CHECK((fine - coarse).cwiseAbs().maxCoeff() < 1e-5);
}

// Without noise there is one trajectory: d psi/dt = -i H psi, by exponentials of H at the middle of 4000 steps,
// extrapolated to order 4 (Commun. Pure Appl. Math. 7, 649 (1954)), and by its own exponential while s stands.
TEST_CASE("without noise every trajectory follows Schroedinger's equation") {
  NoisyRun run = chip_on_pace(2, 16);
  run.timeline = {{{0, 0.5, 0, 0.5}, {0.5, 2.5, 0.5, 0.5}}, 0, 0.5};
  run.times = {2.5};
  const Unravelling model = unravel_fast_noise(operators_table(run, FastEquation::universal, 1e-30), lab_with_jumps(run), false);
  const auto h = dense_hamiltonian<double>(run.family);
  const auto turned = [&](double s, double t, const Ket& psi) {
    return Ket(tarn::test::exponential_of(Complex(0, -t) * h(s).cast<Complex>()) * psi);
  };
  const auto ramped = [&](int steps) {
    Ket psi = run.kets[0];
    for (int k = 0; k < steps; ++k) psi = turned(0.5 * (k + 0.5) / steps, 0.5 / steps, psi);
    return psi;
  };
  const Ket end = turned(0.5, 2, (4.0 * ramped(2000) - ramped(1000)) / 3.0);
  const Eigen::RowVectorXd expected = readings_of({projector(end)}, 2);
  const Eigen::MatrixXd found = readings_of(model, run, 3, 7, 1, 1e-10);
  CHECK((found.rowwise() - expected).cwiseAbs().maxCoeff() < 1e-7);
}

// Poisson statistics: a qubit that is flipped at rate k has made an even number of flips with the chance
// (1 + exp(-2 k t))/2, and waits for the first for exp(-k t); closed forms, no source needed.
TEST_CASE("waiting times are exponential and flips are Poisson's") {
  NoisyRun run{standing_qubit(0, 0), {{{0, 2, 0, 0}}, 0, 0}, {0.5, 2}, {Ket(Ket::Unit(2, 0))}};
  const double rate = 0.8;
  run.jumps = {{{2}, {std::sqrt(rate) * pauli_words(1)[1]}}};
  const Unravelling model = unravel_fast_noise(operators_table(run, FastEquation::universal, 1e-30), lab_with_jumps(run), false);
  Eigen::Index flip = 0;
  (run.jumps[0].matrices[0] * run.kets[0]).cwiseAbs().maxCoeff(&flip);
  REQUIRE(flip == 1);
  const std::size_t count = 8000;
  const Eigen::MatrixXd readings = readings_of(model, run, count, 8);
  for (const Index at : {0, 1}) {
    const double z = readings.col(3 * at).mean(), expected = std::exp(-2 * rate * run.times[static_cast<std::size_t>(at)]);
    CHECK(std::abs(z - expected) < 3.5 * std::sqrt((1 - expected * expected) / count));
  }
}

TEST_CASE("the error falls as the root of the number of trajectories, and is told") {
  NoisyRun run = chip_on_pace(1, 17);
  run.times = {1.3};
  const auto table = operators_table(run, FastEquation::universal, 2e-3);
  const Unravelling model = unravel_fast_noise(table, lab_with_jumps(run), false);
  const double expected = readings_of(density_by_open(run, table), 1)[0];
  std::vector<double> measured;
  for (const std::size_t count : {std::size_t{64}, std::size_t{512}}) {
    double squares = 0, told = 0;
    constexpr int kSeeds = 64;
    for (int seed = 0; seed < kSeeds; ++seed) {
      const Eigen::VectorXd z = readings_of(model, run, count, static_cast<std::uint64_t>(seed)).col(0);
      squares += (z.mean() - expected) * (z.mean() - expected) / kSeeds;
      std::vector<double> sums(sample_groups(count), z.sum()), sizes(sums.size(), static_cast<double>(count));
      for (std::size_t i = 0; i < count; ++i) {
        sums[sample_group(i, count)] -= z[static_cast<Index>(i)];
        sizes[sample_group(i, count)] -= 1;
      }
      for (std::size_t g = 0; g < sums.size(); ++g) sums[g] /= sizes[g];
      const double error = jackknife_error(sums);
      CHECK(std::abs(jackknife_bias(z.mean(), sums)) < 1e-12);
      told += error * error / kSeeds;
    }
    // The variance of 64 errors is known to 18 %.
    CHECK(squares / told == Approx(1).margin(3.5 * 0.177));
    measured.push_back(std::sqrt(squares));
  }
  // Each of the two is known to 9 %.
  CHECK(std::log(measured[0] / measured[1]) / std::log(8.0) == Approx(0.5).margin(3 * 0.125 / std::log(8.0)));
}

// A mixture is met to within one trajectory: what it starts with errs by less than sampling apart would.
TEST_CASE("starts are spread evenly over a mixture") {
  NoisyRun run = chip_on_pace(2, 18);
  run.times = {0, 6};
  run.kets.clear();
  for (Index k = 0; k < 3; ++k) run.kets.push_back(dense_levels<double>(run.family).solve(0, 4).vectors.col(k).cast<Complex>());
  run.weights = {0.62, 0.27, 0.11};
  const auto table = operators_table(run, FastEquation::universal, 2e-3);
  const Unravelling model = unravel_fast_noise(table, lab_with_jumps(run), false);
  const Eigen::MatrixXd readings = readings_of(model, run, 1000, 9);
  const Eigen::RowVectorXd expected = readings_of(density_by_open(run, table), 2), mean = readings.colwise().mean();
  CHECK((mean - expected).head(15).cwiseAbs().maxCoeff() < 3.0 / 1000);
  // Even starts take variance away: the mean is off by no more than the plain standard error says.
  const Eigen::RowVectorXd spread = ((readings.rowwise() - mean).cwiseAbs2().colwise().sum() / (1000.0 * 999.0)).cwiseSqrt();
  CHECK(((mean - expected).cwiseAbs() - 4 * spread).tail(15).maxCoeff() < 1e-9);
}

TEST_CASE("a run that is asked to stop does, and a coefficient that is not finite is an error") {
  const NoisyRun run = chip_on_pace(1, 19);
  Unravelling model = unravel_fast_noise(operators_table(run, FastEquation::universal, 2e-3), lab_with_jumps(run), false);
  TrajectoryRun task;
  task.timeline = &run.timeline;
  task.times = run.times;
  task.kets = run.kets;
  task.weights = run.weights;
  task.count = 10;
  const auto nothing = [](std::size_t, std::size_t, const State&) {};
  const auto stopped = propagate_trajectories(model, task, nothing, [] { return true; });
  REQUIRE(!stopped);
  CHECK(stopped.error().kind == "interrupted");
  LabOperators lab = lab_with_jumps(run);
  const auto coefficients = lab.coefficients;
  lab.coefficients = [coefficients](std::span<const double> s, std::span<const double> t, double* out) {
    coefficients(s, t, out);
    if (s[0] > 0.3) out[0] = std::nan("");
  };
  model = unravel_fast_noise(operators_table(run, FastEquation::universal, 2e-3), lab, false);
  const auto failed = propagate_trajectories(model, task, nothing, {});
  REQUIRE(!failed);
  CHECK(failed.error().kind == "not_finite");
}

TEST_CASE("fewer than two trajectories tell no error") {
  const double one = 1;
  CHECK(std::isinf(jackknife_error({&one, 1})));
  CHECK(sample_groups(1) == 1);
}
