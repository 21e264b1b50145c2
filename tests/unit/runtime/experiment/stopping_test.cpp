// A run that is asked to stop does so within a step of whatever it does, and one that is resumed gets on.
#include <catch2/catch.hpp>

#include <atomic>
#include <cstdlib>
#include <filesystem>

#include "hand_kernels.h"
#include "runtime/experiment/run.h"

using namespace tarn;
using namespace tarn::runtime;
namespace fs = std::filesystem;
using hand::observe;
using hand::setting;

namespace {

Result<RunReport, FolderError> start(const Plan& plan, const Kernel& kernel, const RunOptions& options) {
  const std::vector<PlanAndKernel> plans = {{plan, kernel, {}}};
  return run_experiment(plans, options);
}

/// Runs until it has asked `asks` times whether it should stop. True if it did so, and at once.
bool stops_after(std::size_t asks, const Plan& plan, const Kernel& kernel) {
  std::size_t asked = 0;
  RunOptions options;
  options.interrupted = [&] { return ++asked > asks; };
  const auto report = start(plan, kernel, options);
  REQUIRE(report);
  INFO("asked " << asked << " times");
  CHECK(asked > asks);
  CHECK(asked < asks + 20);
  CHECK(report->points.empty());
  return report->ending == Ending::interrupted;
}

Plan scan_plan(std::size_t places) {
  Plan plan = hand::one_qubit_plan();
  plan.choice.equation = Equation::none;
  plan.begin.reset();
  plan.pace.clear();
  plan.scan = Scan{};
  for (std::size_t k = 0; k < places; ++k) plan.scan->s.push_back(static_cast<double>(k) / static_cast<double>(places));
  observe(plan, "gap", ReadGap{}, Static{});
  return plan;
}

/// A two-qubit chip in a bath, ramped over a long time and looked at once.
Plan davies_plan(bool with_drive) {
  Plan plan = hand::two_qubit_plan(with_drive);
  plan.choice.equation = Equation::davies;
  plan.parameters[2].value = 1.1;  // the temperature
  plan.parameters[hand::kTa].value = 500;
  Bath bath;
  bath.name = "cold";
  bath.components = {GeneralForm{}};
  bath.temperature = setting(6);
  plan.chip.baths = {bath};
  plan.chip.couplings = {{{{{3, {{1, {0, 1}}}}}}, 0, "Z ~ cold"}};
  observe(plan, "z", ReadMean{{{{3, {{1, {0, 1}}}}}}}, AtEnd{});
  return plan;
}

}  // namespace

TEST_CASE("a long scan is stopped between two of its places") {
  CHECK(stops_after(500, scan_plan(2000), hand::one_qubit(false)));
}

TEST_CASE("a driven Davies run is stopped between two steps of its integrator") {
  CHECK(stops_after(500, davies_plan(true), hand::two_qubits(false)));
}

TEST_CASE("a Davies run is stopped between two steps of a pass") {
  Plan plan = davies_plan(false);
  plan.tolerance = 1e-13;  // as many passes as there are
  CHECK(stops_after(3000, plan, hand::two_qubits(false)));
}

TEST_CASE("the share of a long scan that is done is told") {
  std::vector<double> left;
  std::atomic<bool> stop = false;
  RunOptions options;
  options.interrupted = [&] { return stop.load(); };
  options.progress = [&](std::uint64_t done, std::uint64_t total, double seconds) {
    CHECK(done == 0);
    CHECK(total == 1);
    left.push_back(seconds);
    if (left.size() == 2) stop = true;
  };
  const auto report = start(scan_plan(4000000), hand::one_qubit(false), options);
  REQUIRE(report);
  CHECK(report->ending == Ending::interrupted);
  REQUIRE(left.size() >= 2);
  CHECK(left[0] > 0);
  CHECK(left[1] > 0);
}

TEST_CASE("a run that is resumed again and again under too short a limit gets to its end") {
  std::string name = (fs::temp_directory_path() / "tarn-stop-XXXXXX").string();
  REQUIRE(mkdtemp(name.data()) != nullptr);
  Plan plan = hand::one_qubit_plan();
  plan.axes = {{{{"ta", hand::kTa, {"", 1}, {5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15, 16}}}}};
  for (std::uint64_t k = 0; k < 12; ++k) plan.points.push_back(k);
  observe(plan, "p", ReadPopulation{{StateSetKind::ground, 0, "", {}}}, AtEnd{});
  const Kernel kernel = hand::one_qubit(GENERATE(false, true));
  RunOptions options;
  options.out = name;
  options.time_limit = 0;
  std::size_t runs = 0, before = 0;
  bool stalled = false;
  for (; runs < 40; ++runs) {
    const auto report = start(plan, kernel, options);
    REQUIRE(report);
    if (report->ending == Ending::finished) break;
    CHECK(report->ending == Ending::out_of_time);
    // The first may keep its limit to the letter; no two in a row get nowhere.
    if (stalled) CHECK(report->points.size() > before);
    stalled = report->points.size() == before;
    before = report->points.size();
  }
  CHECK(runs < 40);
  fs::remove_all(name);
}
