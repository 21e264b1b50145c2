// Stationary states of the hierarchy, its depth, and the errors its answers tell.
#include <Eigen/Core>
#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "memory_models.h"
#include "runtime/equation/hierarchy_refinement.h"
#include "runtime/equation/hierarchy_steady.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

namespace {

Density first_state() {
  Density rho = Density::Zero(2, 2);
  rho(0, 0) = 1;
  return rho;
}

double z_of(const Density& rho) { return (rho(0, 0) - rho(1, 1)).real(); }

}  // namespace

TEST_CASE("a stationary hierarchy stays, and a long run ends in it") {
  const OpenSystem system = one_qubit(2, 1.3, drude_sum(0.02, 4, 1.5, 2));
  const auto steady = stationary_hierarchy(system, 5, 0, 1e-11, {});
  REQUIRE(steady);
  CHECK(std::abs(steady->rho.trace() - 1.0) < 1e-10);
  CHECK(steady->counters.evaluations < 400);
  const auto ended = hierarchy_states(system, 5, static_run(150), first_state(), {150}, 1e-10);
  CHECK((ended[0] - steady->rho).norm() < 1e-8);
  const Timeline timeline = static_run(3);
  const auto stayed = states_at({3}, timeline, 1e-11, [&](const MemoryRun& run, const Visit& visit) {
    REQUIRE(propagate_hierarchy(system, 5, run, steady->state, visit, {}));
  });
  CHECK((stayed[0] - steady->rho).norm() < 1e-8);
}

// Weak coupling: the state of Gibbs, exp(-H/theta)/Z, up to the first order in eta. Common practice, no source.
TEST_CASE("the stationary state tends to that of Gibbs") {
  const auto distance = [](double eta) {
    const auto steady = stationary_hierarchy(one_qubit(2, 1.3, drude_sum(eta, 4, 1.5, 4)), 3, 0, 1e-11, {});
    REQUIRE(steady);
    Eigen::MatrixXcd h(2, 2);
    one_qubit(2, 1.3, {}).hamiltonian(0, 0, h);
    const Density gibbs = tarn::test::exponential_of(-h / 1.5);
    return (steady->rho - gibbs / gibbs.trace()).norm();
  };
  const double coarse = distance(2e-3), fine = distance(1e-3);
  CHECK(coarse < 5e-3);
  CHECK(coarse / fine == Approx(2).epsilon(0.1));
}

// alpha = 1/2 with a bias: <sz> = (2/pi) Im psi(1/2 + g/(4 pi kT) + i eps/(2 pi kT)) in the limit of large cutoffs, 0.39248 at
// g = 0.70555, eps = kT = 1; Quantum Dissipative Systems (World Scientific). A Drude cutoff wc has g = pi D^2/(2 wc
// e^0.57721566); corrections are of order g/wc.
TEST_CASE("stationary polarisation at alpha = 1/2") {
  const auto polarisation = [](double cutoff, int count, int depth) {
    const double tunnelling = std::sqrt(0.70555 * 2 * cutoff * std::exp(0.57721566) / std::numbers::pi);
    const auto steady = stationary_hierarchy(one_qubit(tunnelling, 1, drude_sum(0.25, cutoff, 1, count)), depth, 0, 1e-7, {});
    if (!steady) FAIL(steady.error().message);
    return z_of(steady->rho);
  };
  const double coarse = polarisation(10, 4, 8) - 0.39248, fine = polarisation(20, 5, 8) - 0.39248;
  CHECK(coarse == Approx(0.015).margin(0.004));
  CHECK(fine / coarse == Approx(0.55).margin(0.1));
}

TEST_CASE("answers of growing depth, with what they say of their error") {
  HierarchyRun run{static_run(4), first_state(), {1, 4}, {}};
  const OpenSystem system = one_qubit(2, 1.3, drude_sum(0.05, 3, 1.5, 2));
  HierarchyOptions options;
  options.tolerance = 1e-11;
  HierarchyRefinement refinement(system, run, options);
  const auto exact = hierarchy_states(system, 16, run.timeline, first_state(), run.times, 1e-12);
  double before = 1;
  for (int round = 0; round < 5; ++round) {
    const auto answer = refinement.next();
    REQUIRE(answer);
    CHECK(answer->depth == options.first_depth + round);
    double told = answer->floor, error = 0;
    for (std::size_t k = 0; k < run.times.size(); ++k) {
      error = std::max(error, (answer->states[k] - exact[k]).norm());
      told = std::max(told, (answer->states[k] - answer->coarser[0].states[k]).norm());
    }
    CHECK(error < told);
    CHECK(told < before);
    before = told;
  }
  CHECK(before < 1e-5);
  CHECK(!refinement.exhausted());
}

TEST_CASE("a depth given is kept, and what coarser sums change is told") {
  HierarchyRun run{static_run(4), first_state(), {4}, {}};
  OpenSystem system = one_qubit(2, 1.3, drude_sum(0.02, 3, 1.5, 3));
  system.baths[0].error = 1e-4;  // Invented, as the next: here it is the ratio that counts.
  ExponentialSum coarse = drude_sum(0.02, 3, 1.5, 1);
  coarse.error = 1e-3;
  HierarchyOptions options;
  options.depth = 5;
  options.coarser_baths = {coarse};
  HierarchyRefinement refinement(system, run, options);
  const auto answer = refinement.next();
  REQUIRE(answer);
  CHECK(refinement.exhausted());
  CHECK(answer->depth == 5);
  REQUIRE(answer->coarser.size() == 2);
  CHECK(answer->coarser[1].weight == Approx(0.2));
  const auto fewer = hierarchy_states(one_qubit(2, 1.3, coarse), 5, run.timeline, first_state(), run.times, options.tolerance);
  CHECK((answer->coarser[1].states[0] - fewer[0]).norm() == 0);
  const auto more = hierarchy_states(one_qubit(2, 1.3, drude_sum(0.02, 3, 1.5, 5)), 5, run.timeline, first_state(), run.times);
  CHECK((answer->states[0] - more[0]).norm() < 0.2 * (answer->states[0] - fewer[0]).norm());
}

TEST_CASE("refinement that begins in the stationary state, and one that has no room") {
  HierarchyRun run{static_run(2), {}, {0, 2}, {}};
  const OpenSystem system = one_qubit(2, 1.3, drude_sum(0.02, 4, 1.5, 2));
  HierarchyRefinement refinement(system, run, {});
  const auto answer = refinement.next();
  REQUIRE(answer);
  CHECK((answer->states[0] - answer->states[1]).norm() < 1e-7);
  HierarchyOptions small;
  small.max_bytes = 1000;
  const auto refused = HierarchyRefinement(system, run, small).next();
  REQUIRE(!refused);
  CHECK(refused.error().kind == "too_large");
}
