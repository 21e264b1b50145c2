// Driven anneals against the same equation written down directly (brute.h).
#include <catch2/catch.hpp>

#include "brute.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {

constexpr double kTheta = 1.96;  // 15 mK in rad/ns

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
  DaviesOptions options;
  options.tolerance = 1e-8;
  const auto answer = run_davies<Scalar>(tables, run, options);
  REQUIRE(answer);
  CHECK(answer->converged);
  const Brute brute{family, baths, track->tolerance()};
  const Segment& whole = run.timeline.segments.front();
  Density state = initial;
  double most = 0, t = 0;
  for (std::size_t k = 0; k < run.times.size(); ++k) {
    const Segment part{t, run.times[k], t / ta, run.times[k] / ta};
    state = brute.run(part, state, static_cast<int>(steps * (part.t1 - part.t0) / (whole.t1 - whole.t0)));
    most = std::max(most, (answer->states[k] - state).cwiseAbs().maxCoeff());
    t = run.times[k];
  }
  CAPTURE(answer->error, answer->state_error, answer->depth);
  CHECK(most < 10 * answer->state_error + 1e-9);
  return most;
}

}  // namespace

TEST_CASE("one qubit, driven through its gap") {
  const auto family = ising(1, gentle(3, 4), {1.0}, {});
  const double difference = largest_difference<double>(family, {kBath}, random_state(2, 1), 12, 20000);
  CHECK(difference < 2e-8);
}

TEST_CASE("two coupled qubits with different fields") {
  const auto family = ising(2, gentle(3, 4), {0.3, -0.8}, {{0, 1, 0.7}}, {1.0, 0.8});
  const double difference = largest_difference<double>(family, {kBath, kBath}, random_state(4, 2), 10, 20000);
  CHECK(difference < 1e-7);
}

TEST_CASE("two coupled qubits, identical: an exact crossing and coinciding frequencies") {
  const auto family = ising(2, gentle(3, 4), {0.4, 0.4}, {{0, 1, 0.7}});
  const double difference = largest_difference<double>(family, {kBath, kBath}, random_state(4, 3), 10, 20000);
  CHECK(difference < 1e-7);
}

TEST_CASE("two free qubits, identical") {
  const auto family = ising(2, gentle(3, 4), {0.4, 0.4}, {});
  const double difference = largest_difference<double>(family, {kBath, kBath}, random_state(4, 4), 8, 16000);
  CHECK(difference < 1e-7);
}

TEST_CASE("a complex Hamiltonian") {
  auto family = ising(2, gentle(3, 4), {0.4, -0.3}, {{0, 1, 0.7}});
  family.hamiltonian.groups[1].terms.push_back({0.35, {3, 1}});  // Y on one qubit, X on the other
  REQUIRE_FALSE(is_real(family));
  const double difference = largest_difference<std::complex<double>>(family, {kBath, kBath}, random_state(4, 5), 8, 16000);
  CHECK(difference < 1e-7);
}
