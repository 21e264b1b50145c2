#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <random>

#include "hand_kernels.h"
#include "runtime/experiment/accuracy.h"

using namespace tarn::runtime;
using hand::observe;

namespace {

/// 500 driven two-qubit anneals with random fields, couplings and times.
Plan random_chips(double tolerance) {
  Plan plan = hand::two_qubit_plan(true);
  std::mt19937_64 random(11);
  std::uniform_real_distribution<double> unit(0, 1);
  Axis axis{{{"a", 0u, {}, {}}, {"b", 1u, {}, {}}, {"c", 2u, {}, {}}, {"ta", hand::kTa, {}, {}}}};
  plan.points.clear();
  for (std::uint64_t i = 0; i < 500; ++i) {
    plan.points.push_back(i);
    axis.columns[0].values.push_back(10 * unit(random));
    axis.columns[1].values.push_back(10 * unit(random));
    axis.columns[2].values.push_back(8 * unit(random));
    axis.columns[3].values.push_back(std::exp(std::log(0.5) + std::log(100.0) * unit(random)));
  }
  plan.axes = {axis};
  observe(plan, "p", ReadPopulation{{StateSetKind::target, 0, "", {}}}, AtEnd{});
  observe(plan, "ground", ReadPopulation{{StateSetKind::ground, 0, "", {}}}, AtS{hand::setting(3), false});
  observe(plan, "y", ReadMean{{{{3, {{1, {1, 1}}, {0.5, {2, 1}}}}}}}, AtEnd{});
  observe(plan, "energy", ReadMeanEnergy{}, AtEnd{});
  plan.observables[3].scale = Scale::energy;
  plan.tolerance = tolerance;
  return plan;
}

RunReport run_all(const Plan& plan) {
  const std::vector<PlanAndKernel> plans = {{plan, hand::two_qubits(true), {}}};
  auto report = run_experiment(plans, {});
  REQUIRE(report);
  return std::move(report).value();
}

}  // namespace

TEST_CASE("reported errors cover the distance to a run 100 times tighter, and not by much") {
  const double tolerance = GENERATE(1e-4, 1e-6);
  const RunReport plain = run_all(random_chips(tolerance)), tight = run_all(random_chips(tolerance / 100));
  REQUIRE(plain.points.size() == 500);
  for (std::size_t o = 0; o < 4; ++o) {
    std::size_t covered = 0;
    std::vector<double> excess;
    for (std::size_t i = 0; i < 500; ++i) {
      const Answer& answer = plain.points[i].series[o][0].answer;
      const double distance = std::abs(answer.value - tight.points[i].series[o][0].answer.value);
      covered += distance <= answer.error ? 1 : 0;
      excess.push_back(answer.error / std::max(distance, 1e-300));
    }
    std::nth_element(excess.begin(), excess.begin() + 250, excess.end());
    INFO("tolerance " << tolerance << ", observable " << o << ": covered " << covered << ", median excess " << excess[250]);
    CHECK(covered >= 475);
    CHECK(excess[250] < 30);
  }
  CHECK(plain.loose == 0);
}

TEST_CASE("a reduction is off by what the errors can move it") {
  const std::vector<Sample> series = {{{0, 0}, {1.0, 0.01}}, {{1, 0}, {0.5, 0.02}}, {{2, 0}, {0.51, 0.1}}};
  const Answer low = reduce_series(Over::lowest, series);
  CHECK(low.value == 0.5);
  CHECK(low.error == Approx(0.09));  // 0.51 - 0.1 is below 0.5 - 0.02
  const Answer high = reduce_series(Over::highest, series);
  CHECK(high.value == 1.0);
  CHECK(high.error == Approx(0.01));
  CHECK(reduce_series(Over::final, series).value == 0.51);
}

TEST_CASE("answers that agree by chance still carry the distance of the states") {
  Snapshot coarse, fine;
  coarse.readings = {{0.25, 0}};
  fine.readings = {{0.25, 0}};
  coarse.probes = {0.1, 0.2};
  fine.probes = {0.1 + 1e-5, 0.2 - 1e-5};
  const ObservableRows doubled = [](std::span<const double> r) { return std::vector<double>{2 * r[0]}; };
  const std::vector<std::uint32_t> used = {0};
  const std::vector<double> norms = {1};
  const std::vector<Comparison> against = {{coarse, kOfLooserKet}};
  const Answer answer = estimate_answer(fine, against, 0, doubled, 0, used, norms);
  CHECK(answer.value == 0.5);
  CHECK(answer.error > 1e-7);
  CHECK(answer.error < 2e-5);
}
