#include <catch2/catch.hpp>

#include <atomic>
#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <map>
#include <nlohmann/json.hpp>
#include <numbers>
#include <sstream>

#include "hand_kernels.h"
#include "runtime/experiment/run.h"
#include "runtime/experiment/summary.h"

using namespace tarn;
using namespace tarn::runtime;
namespace fs = std::filesystem;
using hand::observe;
using hand::setting;

namespace {

StateSet letters(const char* text) { return {StateSetKind::state, 0, text, {}}; }
StateSet kind(StateSetKind which, std::uint32_t level = 0) { return {which, level, "", {}}; }

RunReport run(const Plan& plan, const Kernel& kernel, RunOptions options = {}) {
  const std::vector<PlanAndKernel> plans = {{plan, kernel, {}}};
  auto report = run_experiment(plans, options);
  REQUIRE(report);
  report->any_plan = &plan;
  report->plan_of.assign(report->plan_of.size(), &plan);
  return std::move(report).value();
}

void set(Plan& plan, std::uint32_t slot, double value) { plan.parameters[slot].value = value; }

const Answer& answer(const RunReport& report, std::size_t o, std::size_t point = 0) {
  REQUIRE(point < report.points.size());
  INFO(report.points[point].status);
  REQUIRE_FALSE(report.points[point].error);
  return report.points[point].series[o].front().answer;
}

/// The estimate must cover the error, up to the few percent that it is allowed to miss.
void check_answer(const Answer& found, double expected, double tolerance) {
  CHECK(found.error <= tolerance);
  CHECK(std::abs(found.value - expected) <= 3 * found.error + 1e-14);
}

Axis axis(const char* name, std::uint32_t slot, std::vector<double> values) { return {{{name, slot, {"", 1}, std::move(values)}}}; }

/// Stays at s = 1 for ta.
void hold_at_end(Plan& plan) { plan.pace = {PaceStart{setting(2)}, PaceHold{setting(0)}}; }

fs::path fresh_folder() {
  std::string name = (fs::temp_directory_path() / "tarn-run-XXXXXX").string();
  REQUIRE(mkdtemp(name.data()) != nullptr);
  return name;
}

/// All files of a folder; run.json without what may differ from run to run.
std::map<std::string, std::string> files_of(const fs::path& folder) {
  std::map<std::string, std::string> files;
  for (const auto& entry : fs::directory_iterator(folder)) {
    std::ifstream stream(entry.path(), std::ios::binary);
    std::ostringstream text;
    text << stream.rdbuf();
    files[entry.path().filename()] = text.str();
  }
  if (files.contains("run.json")) {
    auto record = nlohmann::ordered_json::parse(files["run.json"]);
    record.erase("machine");
    files["run.json"] = record.dump();
  }
  return files;
}

/// A grid with a trace, a distribution and a claim.
Plan grid_plan() {
  Plan plan = hand::two_qubit_plan(true);
  set(plan, 2, 1.5);
  plan.axes = {axis("a", 0, {1.0, 2.0, 3.5}), axis("ta", hand::kTa, {2, 5, 9, 13})};
  plan.points = {0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11};
  observe(plan, "p", ReadPopulation{kind(StateSetKind::target)}, AtEnd{});
  observe(plan, "z", ReadMean{{{{3, {{1, {0, 3}}}}}}}, Along{5});
  observe(plan, "low", ReadReduction{Over::lowest, 1}, Static{});
  plan.observables[2].shown = false;
  plan.distribution_at_end = true;
  Claim claim;
  claim.text = "p >= 0.5 where ta > 0.5";
  claim.holds = {ClaimKind::compare, Relation::greater_equal, 0, 5, {}};
  claim.where = ClaimNode{ClaimKind::compare, Relation::greater, 4, 5, {}};
  claim.observables = {0};
  plan.claims = {claim};
  return plan;
}

}  // namespace

TEST_CASE("Rabi oscillation of one qubit") {
  // Textbook: P(t) = D^2/Om^2 sin^2(Om t/2), Om^2 = D^2 + eps^2.
  const bool lanes = GENERATE(false, true);
  Plan plan = hand::one_qubit_plan();
  hold_at_end(plan);
  set(plan, 0, 0.7);
  set(plan, 1, 0.4);
  plan.begin = BeginState{"0"};
  plan.axes = {axis("ta", hand::kTa, {1, 3.3, 20, 55, 140})};
  plan.points = {0, 1, 2, 3, 4};
  observe(plan, "flipped", ReadPopulation{letters("1")}, AtEnd{});
  observe(plan, "along", ReadPopulation{letters("1")}, Along{7});
  const RunReport report = run(plan, hand::one_qubit(lanes));
  REQUIRE(report.points.size() == 5);
  const double rabi = std::hypot(0.7, 0.4);
  const auto flipped = [&](double t) { return 0.49 / (rabi * rabi) * std::pow(std::sin(rabi * t / 2), 2); };
  for (std::size_t i = 0; i < 5; ++i) {
    check_answer(answer(report, 0, i), flipped(plan.axes[0].columns[0].values[i]), 1e-6);
    REQUIRE(report.points[i].series[1].size() == 7);
    for (const Sample& sample : report.points[i].series[1]) check_answer(sample.answer, flipped(sample.at.t), 1e-6);
    CHECK(report.points[i].status == kStatusOk);
  }
}

TEST_CASE("a two-level sweep through the crossing") {
  // Proc. R. Soc. A 137, 696 (1932): exp(-pi D^2/2v); D = 1, v = 2.5. The ends at |eps| = 75 leave 1e-6.
  Plan plan = hand::one_qubit_plan();
  set(plan, 0, 1);
  set(plan, 1, 75);
  set(plan, hand::kTa, 60);
  observe(plan, "above", ReadPopulation{kind(StateSetKind::level, 1)}, AtEnd{});
  observe(plan, "below", ReadPopulation{kind(StateSetKind::ground)}, AtEnd{});
  observe(plan, "pure", ReadPurity{}, AtEnd{});
  const RunReport report = run(plan, hand::one_qubit(true));
  CHECK(answer(report, 0).value == Approx(0.533488091).margin(1e-5));
  CHECK(answer(report, 0).value + answer(report, 1).value == Approx(1).margin(1e-7));
  CHECK(answer(report, 2).value == Approx(1).margin(1e-7));
}

TEST_CASE("decay by a Lindblad operator") {
  // Population of |1> under sqrt(rate) |0><1|: exp(-rate t); coherence exp(-rate t/2).
  Plan plan = hand::one_qubit_plan();
  plan.choice.equation = Equation::lindblad;
  hold_at_end(plan);
  set(plan, 0, 0);
  set(plan, 1, 2.2);
  set(plan, 2, 0.13);
  plan.begin = GENERATE(Begin{BeginState{"1"}}, Begin{BeginPlus{}});
  const bool plus = std::holds_alternative<BeginPlus>(*plan.begin);
  observe(plan, "excited", ReadPopulation{letters("1")}, AtEnd{});
  observe(plan, "coherence", ReadCoherence{0, 1}, AtEnd{});
  const RunReport report = run(plan, hand::one_qubit(GENERATE(false, true)));
  check_answer(answer(report, 0), (plus ? 0.5 : 1.0) * std::exp(-1.3), 1e-6);
  check_answer(answer(report, 1), plus ? 0.5 * std::exp(-0.65) : 0.0, 1e-6);
}

TEST_CASE("relaxation by Davies' equation of a qubit that stands still") {
  // Golden rule with A = Z: 1/T1 = (D/Om)^2 [gamma(Om) + gamma(-Om)], gamma(w) = 2 pi J(w)/(1 - exp(-w/theta));
  // stationary state: Gibbs. Source: Quantum Dissipative Systems (World Scientific).
  Plan plan = hand::one_qubit_plan();
  plan.choice.equation = Equation::davies;
  hold_at_end(plan);
  set(plan, 0, 1.5);
  set(plan, 1, 2.0);
  set(plan, 2, 1.1);  // the temperature
  Bath bath;
  bath.name = "cold";
  bath.components = {GeneralForm{}};  // J = 1e-3 w exp(-w/50)
  bath.temperature = setting(6);
  plan.chip.baths = {bath};
  plan.chip.couplings = {{{{{3, {{1, {0, 1}}}}}}, 0, "Z ~ cold"}};
  plan.begin = BeginPopulations{{setting(1), setting(2)}};
  plan.axes = {axis("ta", hand::kTa, {30, 200, 3000})};
  plan.points = {0, 1, 2};
  observe(plan, "upper", ReadPopulation{kind(StateSetKind::level, 1)}, AtEnd{});
  const RunReport report = run(plan, hand::one_qubit(true));
  const double w = 2.5, theta = 1.1, mix = 1.5 / 2.5;
  const double down = 2 * std::numbers::pi * 1e-3 * w * std::exp(-w / 50) / (1 - std::exp(-w / theta)) * mix * mix;
  const double up = down * std::exp(-w / theta);
  for (std::size_t i = 0; i < 3; ++i) {
    const double t = plan.axes[0].columns[0].values[i];
    const double steady = up / (up + down);
    check_answer(answer(report, 0, i), steady + (1 - steady) * std::exp(-(up + down) * t), 1e-6);
  }
}

TEST_CASE("states to begin with") {
  Plan plan = hand::one_qubit_plan();
  plan.choice.equation = GENERATE(Equation::none, Equation::schroedinger, Equation::davies);
  plan.pace = {PaceStart{setting(2)}};
  set(plan, 0, 1.5);
  set(plan, 1, 2.0);
  set(plan, 2, 0.9);
  observe(plan, "lower", ReadPopulation{kind(StateSetKind::level, 0)}, AtEnd{});
  observe(plan, "pure", ReadPurity{}, AtEnd{});
  observe(plan, "energy", ReadMeanEnergy{}, AtEnd{});
  const Kernel kernel = hand::one_qubit(true);
  SECTION("ground") {
    const RunReport report = run(plan, kernel);
    CHECK(answer(report, 0).value == Approx(1));
    CHECK(answer(report, 2).value == Approx(-1.25));
  }
  SECTION("thermal, at a temperature given") {
    plan.begin = BeginThermal{setting(6)};
    const RunReport report = run(plan, kernel);
    const double lower = 1 / (1 + std::exp(-2.5 / 0.9));
    CHECK(answer(report, 0).value == Approx(lower).epsilon(1e-12));
    CHECK(answer(report, 1).value == Approx(lower * lower + (1 - lower) * (1 - lower)).epsilon(1e-12));
  }
  SECTION("thermal without a bath or a temperature") {
    plan.begin = BeginThermal{};
    const RunReport report = run(plan, kernel);
    REQUIRE(report.points[0].error);
    CHECK(report.points[0].error->kind == "no_common_temperature");
  }
  SECTION("an even mixture where all levels coincide") {
    set(plan, 0, 0);
    set(plan, 1, 0);
    const RunReport report = run(plan, kernel);
    CHECK(answer(report, 1).value == Approx(0.5));
    CHECK(answer(report, 0).value == Approx(1));  // the level is both states
  }
  SECTION("plus") {
    plan.begin = BeginPlus{};
    CHECK(answer(run(plan, kernel), 2).value == Approx(-0.75));
  }
  SECTION("populations that are none") {
    plan.begin = BeginPopulations{{setting(2), setting(2)}};
    CHECK(run(plan, kernel).points[0].error->kind == "bad_populations");
  }
}

TEST_CASE("a scan of the gap, its lowest value and a claim on it") {
  Plan plan = hand::one_qubit_plan();
  plan.choice.equation = Equation::none;
  plan.begin.reset();
  plan.pace.clear();
  set(plan, 0, 0.8);
  set(plan, 1, 3);
  plan.scan = Scan{{0, 0.25, 0.5, 1}};
  observe(plan, "gap", ReadGap{}, Static{});
  observe(plan, "low", ReadReduction{Over::lowest, 0}, Static{});
  observe(plan, "e1", ReadLevel{1}, Static{});
  plan.observables[1].shown = false;
  Claim claim;
  claim.text = "lowest(gap) >= 0.5";
  claim.holds = {ClaimKind::compare, Relation::greater_equal, 1, 5, {}};
  claim.observables = {1};
  plan.claims = {claim};
  const RunReport report = run(plan, hand::one_qubit(false));
  const auto& gap = report.points[0].series[0];
  REQUIRE(gap.size() == 4);
  for (const Sample& sample : gap) {
    const double s = sample.at.s;
    CHECK(sample.answer.value == Approx(std::hypot(0.8, 3 * (2 * s - 1))));
    CHECK(sample.answer.error < 1e-13);
  }
  CHECK(report.points[0].series[2][3].answer.value == Approx(std::hypot(0.4, 1.5)));
  CHECK(answer(report, 1).value == Approx(0.8));
  REQUIRE(report.claims.size() == 1);
  CHECK(report.claims[0].verdict == Verdict::holds);
  CHECK(report.claims[0].tally.weakest->margin == Approx(0.3));
  CHECK(exit_status(report) == 0);
  const std::string text = summary(report);
  CHECK(text.find("holds      lowest(gap) >= 0.5") != std::string::npos);
  CHECK(text.find("low ") == std::string::npos);
}

TEST_CASE("target, distribution and fidelity of a slow anneal") {
  Plan plan = hand::two_qubit_plan(false);
  set(plan, 0, 4);
  set(plan, 1, 4);
  set(plan, hand::kTa, 200);
  observe(plan, "success", ReadPopulation{kind(StateSetKind::target)}, AtEnd{});
  observe(plan, "same", ReadFidelity{"10"}, AtEnd{});
  observe(plan, "all", ReadPopulation{kind(StateSetKind::any)}, AtEnd{});
  plan.distribution_at_end = true;
  const RunReport report = run(plan, hand::two_qubits(true));
  // 0.3 Z0 - 0.5 Z1 + Z0 Z1 is lowest at 10 (-1.8).
  CHECK(answer(report, 0).value > 0.98);
  CHECK(answer(report, 1).value == answer(report, 0).value);
  CHECK(answer(report, 2).value == Approx(1).margin(1e-6));
  REQUIRE(report.points[0].distribution.size() == 4);
  CHECK(report.points[0].distribution[2].value == answer(report, 0).value);
  CHECK(report.points[0].distribution[2].error <= 1e-6);
}

TEST_CASE("plain and lane entries agree within the errors they report") {
  Plan plan = grid_plan();
  const RunReport plain = run(plan, hand::two_qubits(false)), lanes = run(plan, hand::two_qubits(true));
  for (std::size_t i = 0; i < plain.points.size(); ++i) {
    const Answer& a = answer(plain, 0, i);
    const Answer& b = answer(lanes, 0, i);
    CHECK(std::abs(a.value - b.value) <= 3 * (a.error + b.error));
  }
}

TEST_CASE("the files are the same for 1, 2 and 5 jobs") {
  const Plan plan = grid_plan();
  const Kernel kernel = hand::two_qubits(GENERATE(false, true));
  std::map<std::string, std::string> first;
  for (const std::size_t jobs : {1u, 2u, 5u}) {
    const fs::path folder = fresh_folder();
    RunOptions options;
    options.jobs = jobs;
    options.out = folder;
    options.provenance = {"0.1", "b1", {{"model.tarn", "00ff"}}, {}, "somewhere"};
    const RunReport report = run(plan, kernel, options);
    CHECK(report.ending == Ending::finished);
    const auto files = files_of(folder / "trial");
    CHECK(files.size() == 4);
    if (first.empty()) first = files;
    CHECK(files == first);
    fs::remove_all(folder);
  }
}

TEST_CASE("an interrupted run keeps its rows, and continued it ends with the same bytes") {
  const Plan plan = grid_plan();
  const Kernel kernel = hand::two_qubits(false);
  const fs::path whole = fresh_folder(), parts = fresh_folder();
  RunOptions options;
  options.provenance = {"0.1", "b1", {{"model.tarn", "00ff"}}, {}, "somewhere"};
  options.out = whole;
  run(plan, kernel, options);

  options.out = parts;
  std::atomic<bool> stop = false;
  std::uint64_t last = 0;
  options.progress = [&](std::uint64_t done, std::uint64_t total, double) {
    CHECK(total == 12);
    last = done;
    if (done == 5) stop = true;
  };
  options.interrupted = [&] { return stop.load(); };
  const RunReport cut = run(plan, kernel, options);
  CHECK(cut.ending == Ending::interrupted);
  CHECK(cut.points.size() == 5);
  CHECK(last == 5);
  CHECK(exit_status(cut) == 3);
  CHECK(cut.claims[0].verdict != Verdict::holds);
  CHECK(files_of(parts / "trial") != files_of(whole / "trial"));

  options.interrupted = {};
  options.progress = {};
  const RunReport rest = run(plan, kernel, options);
  CHECK(rest.reused == 5);
  CHECK(rest.points.size() == 12);
  CHECK(files_of(parts / "trial") == files_of(whole / "trial"));

  options.provenance.texts[0].sha256 = "00fe";
  const std::vector<PlanAndKernel> plans = {{plan, kernel, {}}};
  const auto refused = run_experiment(plans, options);
  REQUIRE_FALSE(refused);
  CHECK(refused.error().kind == "other_key");
  fs::remove_all(whole);
  fs::remove_all(parts);
}

TEST_CASE("failed points keep a row, the others are not touched") {
  Plan plan = hand::one_qubit_plan();
  plan.axes = {axis("ta", hand::kTa, {5, -1, 8})};
  plan.points = {0, 1, 2};
  observe(plan, "p", ReadPopulation{kind(StateSetKind::ground)}, AtEnd{});
  const RunReport report = run(plan, hand::one_qubit(true));
  REQUIRE(report.points.size() == 3);
  CHECK(report.points[1].error->kind == "negative_time");
  CHECK(report.points[1].error->place.line == 1);
  CHECK(report.failed == 1);
  CHECK(exit_status(report) == 3);
  Plan alone = plan;
  alone.axes = {axis("ta", hand::kTa, {8})};
  alone.points = {0};
  CHECK(answer(run(alone, hand::one_qubit(true)), 0).value == answer(report, 0, 2).value);
  const std::string text = summary(report);
  CHECK(text.find("negative_time") != std::string::npos);
  CHECK(text.find("1 of 3 points failed") != std::string::npos);
  // Read back from the folder, the failed point still knows what is at fault.
  RunOptions options;
  options.out = fresh_folder();
  run(plan, hand::one_qubit(true), options);
  const RunReport again = run(plan, hand::one_qubit(true), options);
  CHECK(again.reused == 3);
  REQUIRE(again.points[1].error);
  CHECK(again.points[1].error->kind == "negative_time");
  CHECK(again.points[1].error->place == report.points[1].error->place);
  fs::remove_all(*options.out);
}

TEST_CASE("a sample of the grid decides no claim that could still fail") {
  Plan plan = grid_plan();
  plan.claims[0].holds = {ClaimKind::compare, Relation::greater_equal, 4, 5, {}};  // ta >= 0.5
  RunOptions options;
  options.sample = 4;
  const RunReport report = run(plan, hand::two_qubits(true), options);
  REQUIRE(report.points.size() == 4);
  CHECK(report.points[1].index == 4);
  CHECK(report.points.back().index == 11);
  CHECK(report.claims[0].verdict == Verdict::undecided);
  CHECK(exit_status(report) == 0);
}

TEST_CASE("a tolerance beyond reach is marked, a time limit ends the run") {
  Plan plan = hand::one_qubit_plan();
  observe(plan, "p", ReadPopulation{letters("0")}, AtEnd{});
  plan.tolerance = 1e-16;
  const RunReport loose = run(plan, hand::one_qubit(false));
  CHECK(loose.points[0].status == kStatusLoose);
  CHECK(loose.loose == 1);
  CHECK(answer(loose, 0).error > 1e-16);
  RunOptions options;
  options.time_limit = 0;
  const RunReport late = run(plan, hand::one_qubit(false), options);
  CHECK(late.ending == Ending::out_of_time);
  CHECK(late.points.empty());
  CHECK(exit_status(late) == 3);
}

TEST_CASE("moments: at a time, at an s, and those that are never met") {
  Plan plan = hand::one_qubit_plan();
  set(plan, hand::kTa, 10);
  observe(plan, "half", ReadPopulation{kind(StateSetKind::ground)}, AtS{setting(3), false});
  observe(plan, "at_one", ReadPopulation{kind(StateSetKind::ground)}, AtTime{setting(2)});
  observe(plan, "trace", ReadPopulation{kind(StateSetKind::ground)}, Along{11});
  const RunReport report = run(plan, hand::one_qubit(false));
  const auto& trace = report.points[0].series[2];
  REQUIRE(trace.size() == 11);
  CHECK(answer(report, 0).value == trace[5].answer.value);
  CHECK(answer(report, 1).value == trace[1].answer.value);
  // A moment that never comes leaves its own value empty and the others as they are.
  plan.observables[1].moment = GENERATE(Moment{AtTime{setting(0)}}, Moment{AtS{setting(2), false}});
  plan.pace = {PaceRamp{setting(3), setting(2)}};
  const RunReport cut = run(plan, hand::one_qubit(false));
  REQUIRE_FALSE(cut.points[0].error);
  CHECK(cut.points[0].status == kStatusNotMet);
  CHECK(cut.points[0].series[1].empty());
  CHECK(cut.points[0].series[2].size() == 11);
  CHECK(answer(cut, 0).value == cut.points[0].series[2].back().answer.value);
  CHECK(cut.loose == 1);
  CHECK(exit_status(cut) == 0);
  CHECK(summary(cut).find(kStatusNotMet) != std::string::npos);
  Plan alone = plan;
  alone.observables = {plan.observables[1]};
  const RunReport nothing = run(alone, hand::one_qubit(false));
  CHECK(nothing.points[0].status == kStatusNotMet);
  plan.observables.resize(1);
  plan.choice.equation = Equation::none;
  CHECK(run(plan, hand::one_qubit(false)).points[0].error->kind == "no_equation");
}

TEST_CASE("the short table leaves out the middle and shows the digits that are known") {
  Plan plan = hand::one_qubit_plan();
  plan.axes = {axis("ta", hand::kTa, {})};
  for (std::uint64_t i = 0; i < 30; ++i) {
    plan.axes[0].columns[0].values.push_back(0.5 * static_cast<double>(i));
    plan.points.push_back(i);
  }
  plan.points.erase(plan.points.begin());
  observe(plan, "p", ReadPopulation{kind(StateSetKind::ground)}, AtEnd{});
  const std::string text = summary(run(plan, hand::one_qubit(true)), 7);
  CHECK(std::count(text.begin(), text.end(), '\n') == 8);
  CHECK(text.find("... 24 more") != std::string::npos);
  CHECK(digits_allowed(0.123456789, 1e-4) == "0.12346");
  CHECK(digits_allowed(0.123456789, 1e-12) == "0.12345679");
  CHECK(digits_allowed(0.1, 0) == "0.1");
}
