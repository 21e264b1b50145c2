// Driven anneals against the same equation written down directly (brute.h).
#include <catch2/catch.hpp>

#include "brute.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {


const BathFunctions kBath{ohmic_rate(2e-2, 30, kTheta), smooth_shift(2e-2, 30)};

Schedules gentle(double a, double b) {
  return {[a](double s) { return a * (1 - s) * (1 - s); }, [a](double s) { return -2 * a * (1 - s); },
          [b](double s) { return b * s; }, [b](double) { return b; }};
}

Density random_state(Eigen::Index size, unsigned seed) {
  std::srand(seed);
  const Eigen::MatrixXcd root = Eigen::MatrixXcd::Random(size, size);
  const Density square = root * root.adjoint();
  return square / square.trace();
}

template <class Scalar>
double largest_difference(const HamiltonianFamily& family, const std::vector<BathFunctions>& baths, const Density& initial, double ta, int steps) {
  const auto track = std::make_shared<const Track<Scalar>>(dense_levels<Scalar>(family), TrackOptions{});
  const DaviesTables<Scalar> tables(track, baths);
  DaviesRun run;
  run.timeline = ramp(ta);
  run.initial = initial;
  run.times = {0.3 * ta, 0.5 * ta, ta};
  const auto answer = refine_to<Scalar>(1e-8, tables, run);
  REQUIRE(answer);
  CHECK(answer->converged);
  const Brute brute{family, baths, track->tolerance()};
  const Segment& whole = run.timeline.segments.front();
  // Without couplings at s = 0, frequencies coincide there and part as s^2: a short stretch with another generator, which
  // the fixed steps of the reference must not step across.
  double most = 0, t = 0.004 * ta;
  Density state = brute.run({0, t, 0, t / ta}, initial, 4000);
  for (std::size_t k = 0; k < run.times.size(); ++k) {
    const Segment part{t, run.times[k], t / ta, run.times[k] / ta};
    state = brute.run(part, state, static_cast<int>(steps * (part.t1 - part.t0) / (whole.t1 - whole.t0)));
    most = std::max(most, (answer->states[k] - state).cwiseAbs().maxCoeff());
    CHECK((answer->states[k] - state).diagonal().cwiseAbs().maxCoeff() < 5e-8);
    t = run.times[k];
  }
  CAPTURE(answer->error, answer->state_error);
  CHECK(most < 10 * answer->state_error + 1e-9);
  return most;
}

}  // namespace

TEST_CASE("one qubit, driven through its gap") {
  const auto family = ising(1, gentle(3, 4), {1.0}, {});
  const double difference = largest_difference<double>(family, {kBath}, random_state(2, 1), 12, 8000);
  CHECK(difference < 2e-7);
}

TEST_CASE("two coupled qubits with different fields") {
  const auto family = ising(2, gentle(3, 4), {0.3, -0.8}, {{0, 1, 0.7}}, {1.0, 0.8});
  const double difference = largest_difference<double>(family, {kBath, kBath}, random_state(4, 2), 10, 8000);
  CHECK(difference < 5e-7);
}

TEST_CASE("two coupled qubits, identical: an exact crossing and coinciding frequencies") {
  const auto family = ising(2, gentle(3, 4), {0.4, 0.4}, {{0, 1, 0.7}});
  const double difference = largest_difference<double>(family, {kBath, kBath}, random_state(4, 3), 10, 8000);
  CHECK(difference < 5e-7);
}

TEST_CASE("two free qubits, identical") {
  const auto family = ising(2, gentle(3, 4), {0.4, 0.4}, {});
  const double difference = largest_difference<double>(family, {kBath, kBath}, random_state(4, 4), 8, 6000);
  CHECK(difference < 5e-7);
}

TEST_CASE("a complex Hamiltonian") {
  auto family = ising(2, gentle(3, 4), {0.4, -0.3}, {{0, 1, 0.7}});
  family.hamiltonian.groups[1].terms.push_back({0.35, {3, 1}});  // Y on one qubit, X on the other
  REQUIRE_FALSE(is_real(family));
  const double difference = largest_difference<std::complex<double>>(family, {kBath, kBath}, random_state(4, 5), 8, 6000);
  CHECK(difference < 5e-7);
}

// Jumps as written and a drive in t go by explicit steps; so does the whole equation when asked to.
TEST_CASE("jumps as written and a drive") {
  const auto family = ising(1, gentle(3, 4), {1.0}, {});
  const auto track = std::make_shared<const Track<double>>(dense_levels<double>(family), TrackOptions{});
  const DaviesTables<double> tables(track, {kBath});
  Eigen::MatrixXcd lower = Eigen::MatrixXcd::Zero(2, 2), x = Eigen::MatrixXcd::Zero(2, 2);
  lower(0, 1) = 1;
  x(0, 1) = x(1, 0) = 1;
  DaviesRun run{ramp(6), random_state(2, 8), {2.5, 6}, {{lower, 0.05}}, [x](double t) -> Eigen::MatrixXcd { return 0.4 * std::cos(3 * t) * x; }};
  const auto answer = refine_to<double>(1e-7, tables, run);
  REQUIRE(answer);
  CHECK(answer->converged);
  const Brute brute{family, {kBath}, track->tolerance(), run.jumps, run.drive};
  const Density middle = brute.run({0, 2.5, 0, 2.5 / 6}, run.initial, 4000), end = brute.run({2.5, 6, 2.5 / 6, 1}, middle, 6000);
  CHECK((answer->states[0] - middle).cwiseAbs().maxCoeff() < 1e-7);
  CHECK((answer->states[1] - end).cwiseAbs().maxCoeff() < 1e-7);
}
