// Anneals with a known answer, the order of the steps, and whether error estimates hold.
#include <Eigen/Dense>
#include <unsupported/Eigen/KroneckerProduct>
#include <catch2/catch.hpp>
#include <thread>

#include "brute.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {


const BathFunctions kWeakBath{ohmic_rate(4e-4, kTwoPi * 8, kTheta), smooth_shift(4e-4, kTwoPi * 8)};

std::shared_ptr<const Track<double>> track_of(const HamiltonianFamily& family, Eigen::Index levels = 0) {
  TrackOptions options;
  options.levels = levels;
  return std::make_shared<const Track<double>>(dense_levels<double>(family), options);
}

std::vector<BathFunctions> silent(std::size_t count) { return same_baths(count, {ohmic_rate(0.0, 50, kTheta), {}}); }

double population(const Density& state, const Track<double>& track, double s, Eigen::Index level) {
  const Eigen::VectorXd vector = track.at(s).vectors.col(level);
  return (vector.transpose() * state * vector)(0, 0).real();
}

}  // namespace

// Proc. R. Soc. A 137, 696 (1932): P = exp(-pi D^2 / 2 v), in adiabatic states; D = 1, v = 2.5 gives 0.533488091,
// and |t| = 60 is long enough for 1e-6.
TEST_CASE("a two-level sweep without a bath") {
  const double d = 1, v = 2.5, end = 60;
  const Schedules sweep{[=](double) { return d; }, [](double) { return 0.0; }, [=](double s) { return v * end * (2 * s - 1); },
                        [=](double) { return 2 * v * end; }};
  const auto track = track_of(ising(1, sweep, {-1.0}, {}));
  const DaviesTables<double> tables(track, silent(1));
  const auto answer = refine_to<double>(1e-8, tables, {ramp(2 * end), ground_state(*track, 0), {2 * end}, {}, {}});
  REQUIRE(answer);
  CHECK(answer->converged);
  CHECK(population(answer->states[0], *track, 1, 1) == Approx(std::exp(-std::numbers::pi * d * d / (2 * v))).margin(1e-6));
}

TEST_CASE("the error of a pass falls as the square of the step") {
  const auto family = random_chip(2, 3, usual_schedules());
  const auto track = track_of(family);
  const DaviesTables<double> tables(track, same_baths(2, kWeakBath));
  const DaviesRun run{ramp(2), ground_state(*track, 0), {2}, {}, {}};
  std::vector<Density> ends;
  for (int depth = 2; depth <= 7; ++depth) ends.push_back(davies_pass<double>(tables, run, depth, {})->states[0]);
  for (std::size_t k = 1; k + 1 < ends.size() - 1; ++k) {
    const double coarse = (ends[k] - ends[k - 1]).norm(), fine = (ends[k + 1] - ends[k]).norm();
    CHECK(coarse / fine == Approx(4).epsilon(0.15));
  }
}

// Each step spans up to forty turns of the qubit. Turns that come and go within a step shift the levels (second order of
// the Magnus series); without that shift the phase of a superposition is off by 3e-4 here, whatever is extrapolated.
TEST_CASE("a superposition keeps its phase with steps of many turns") {
  const Schedules schedules{[](double s) { return kTwoPi * 3 * (1 - s); }, [](double) { return -kTwoPi * 3; },
                            [](double s) { return kTwoPi * 5 * s; }, [](double) { return kTwoPi * 5; }};
  const auto family = ising(1, schedules, {-0.8}, {});
  const auto track = track_of(family);
  const DaviesTables<double> tables(track, silent(1));
  const double ta = 200;
  Eigen::VectorXcd start(2);
  start << 0.8, std::complex<double>(0.36, 0.48);
  const DaviesRun run{ramp(ta), projector(start), {ta}, {}, {}};
  const Brute brute{family, silent(1), track->tolerance()};
  const Density exact = brute.run({0, ta, 0, 1}, run.initial, 200000);
  const auto coarse = davies_pass<double>(tables, run, 1, {}), fine = davies_pass<double>(tables, run, 2, {});
  REQUIRE((coarse && fine));
  CHECK(fine->counters.steps < 100);
  CHECK(((4.0 * fine->states[0] - coarse->states[0]) / 3.0 - exact).norm() < 1e-5);
}

TEST_CASE("error estimates cover the truth in random runs") {
  int covered = 0, runs = 0;
  for (unsigned seed = 1; seed <= 6; ++seed) {
    const auto family = random_chip(2 + static_cast<int>(seed % 2), seed, usual_schedules());
    const auto track = track_of(family);
    const DaviesTables<double> tables(track, same_baths(family.couplings.size(), kWeakBath));
    const double ta = 3.0 * std::pow(1.9, seed);
    DaviesRun run{{{{0, 0.4 * ta, 0, 0.4}, {0.4 * ta, 0.7 * ta, 0.4, 0.4}, {0.7 * ta, 1.3 * ta, 0.4, 1}}, 0, 1},
                  ground_state(*track, 0), {0.23 * ta, 0.6 * ta, 1.1 * ta, 1.3 * ta}, {}, {}};
    const auto rough = refine_to<double>(1e-5, tables, run), fine = refine_to<double>(1e-7, tables, run);
    REQUIRE((rough && fine));
    CHECK(rough->converged);
    double off = 0;
    for (std::size_t k = 0; k < run.times.size(); ++k) off = std::max(off, (rough->states[k] - fine->states[k]).diagonal().cwiseAbs().maxCoeff());
    covered += off <= rough->error + fine->error ? 1 : 0;
    ++runs;
    CHECK(off <= 1e-5);
  }
  CHECK(covered == runs);
}

TEST_CASE("fewer levels: the answer is close and the leakage says how close") {
  const auto family = random_chip(4, 11, usual_schedules());
  const auto all = track_of(family), few = track_of(family, 6);
  CHECK(few->levels() >= 6);
  CHECK(few->levels() < 16);
  const auto baths = same_baths(4, kWeakBath);
  const DaviesTables<double> full(all, baths), reduced(few, baths);
  const DaviesRun run{{{{0, 300, 0.2, 0.9}}, 0.2, 0.9}, ground_state(*all, 0.2), {300}, {}, {}};
  const auto exact = refine_to<double>(1e-6, full, run), kept = refine_to<double>(1e-6, reduced, run);
  REQUIRE((exact && kept));
  CHECK(exact->leakage < 1e-12);
  CHECK(kept->leakage < 1e-2);
  CHECK((exact->states[0] - kept->states[0]).diagonal().cwiseAbs().maxCoeff() < kept->leakage + 1e-6);
  CHECK(kept->states[0].trace().real() == Approx(1).margin(1e-9));
}

// Qubits that nothing joins evolve each on its own, exactly. Together, every frequency of one qubit comes 32 times, once for
// each state of the others, and levels cross all along.
TEST_CASE("six qubits without bonds are six times one") {
  const std::vector<double> h = {0.31, -0.47, 0.62, -0.23, 0.55, 0.41}, g = {1.0, 1.13, 0.92, 1.07, 0.85, 1.21};
  const BathFunctions bath{ohmic_rate(5e-3, kTwoPi * 8, kTheta), smooth_shift(5e-3, kTwoPi * 8)};
  const Timeline pace = ramp(2, 0.4, 0.6);
  const auto start = [](std::size_t q) {
    Eigen::VectorXcd state(2);
    state << std::cos(0.3 + 0.2 * static_cast<double>(q)), std::complex<double>(0, std::sin(0.3 + 0.2 * static_cast<double>(q)));
    return state;
  };
  Density product = Density::Identity(1, 1), initial = product;
  for (std::size_t q = 0; q < 6; ++q) {
    const auto track = track_of(ising(1, usual_schedules(), {h[q]}, {}, {g[q]}));
    const DaviesTables<double> tables(track, {bath});
    const auto one = refine_to<double>(1e-8, tables, {pace, projector(start(q)), {2}, {}, {}});
    REQUIRE(one);
    product = Density(Eigen::kroneckerProduct(product, one->states[0]));
    initial = Density(Eigen::kroneckerProduct(initial, projector(start(q))));
  }
  const auto family = ising(6, usual_schedules(), h, {}, g);
  TrackOptions options;
  options.s_min = 0.4;
  options.s_max = 0.6;
  const auto track = std::make_shared<const Track<double>>(dense_levels<double>(family), options);
  CHECK(track->levels() == 64);
  const DaviesTables<double> tables(track, same_baths(6, bath));
  const auto all = refine_to<double>(1e-6, tables, {pace, initial, {2}, {}, {}});
  REQUIRE(all);
  CHECK(all->converged);
  CHECK((all->states[0] - product).diagonal().cwiseAbs().maxCoeff() < all->error);
  CHECK((all->states[0] - product).norm() < all->state_error);
  CHECK((product - initial).norm() > 0.1);
}

TEST_CASE("threads that share a track get the same bits") {
  const auto family = random_chip(3, 5, usual_schedules());
  const auto work = [&](unsigned threads) {
    const auto track = track_of(family);
    const DaviesTables<double> tables(track, same_baths(3, kWeakBath));
    std::vector<Density> ends(6);
    std::vector<std::thread> pool;
    for (unsigned t = 0; t < threads; ++t)
      pool.emplace_back([&, t] {
        for (std::size_t k = t; k < ends.size(); k += threads)
          ends[k] = refine_to<double>(1e-6, tables, {ramp(10.0 * static_cast<double>(k + 1)), ground_state(*track, 0), {10.0 * static_cast<double>(k + 1)}, {}, {}})->states[0];
      });
    for (auto& thread : pool) thread.join();
    return ends;
  };
  const auto one = work(1), two = work(2);
  for (std::size_t k = 0; k < one.size(); ++k) CHECK(one[k] == two[k]);
}

// Fast steps are stopped early and hand over.
TEST_CASE("explicit steps go on where fast ones stop") {
  const auto track = track_of(random_chip(1, 7, usual_schedules()));
  const DaviesTables<double> tables(track, same_baths(1, kWeakBath));
  DaviesOptions options;
  options.last_depth = 2;
  DaviesRefinement<double> refinement(tables, {ramp(3), ground_state(*track, 0), {3}, {}, {}}, options);
  const auto fast = refinement.next();
  REQUIRE(fast);
  REQUIRE(!refinement.exhausted());
  const auto better = refinement.next();
  REQUIRE(better);
  CHECK((better->states[0] - fast->states[0]).norm() < 1e-3);
  CHECK((better->states[0] - fast->states[0]).norm() > 0);
}
