// The judge: ratios by hand, verdicts, places where they change, rows, windows.
#include <catch2/catch.hpp>
#include <cmath>
#include <complex>
#include <numbers>
#include <set>

#include "runtime/validity/along.h"
#include "runtime/validity/secular.h"
#include "runtime/validity/window.h"

using namespace tarn::runtime;

namespace {

constexpr double kWholeTurn = 2 * std::numbers::pi;

/// An exponential C = c exp(-nu t) has tau_SB = nu/c, tau_B = 1/nu: closed form.
NoiseScale exponential_noise(double c, double nu, double norm = 1) { return {norm, {nu / c, 1 / nu, 0, 0}, 0}; }

ValidityInput qubit(Equation equation) {
  ValidityInput in;
  in.equation = equation;
  in.noises = {exponential_noise(0.5, 10)};
  in.energies = Eigen::Vector2d(-3, 3);
  in.t1 = 40;
  in.t2 = 60;
  in.largest_rate = 0.03;
  in.noises[0].window = 1.5;
  return in;
}

const ConditionRatio* find(const ValidityJudgement& judgement, ConditionKind kind) {
  for (const ConditionRatio& ratio : judgement.conditions)
    if (ratio.condition->kind == kind) return &ratio;
  return nullptr;
}

using Rate = std::function<void(std::span<const double>, double*)>;

Rate linear_rate(double slope) {
  return [=](std::span<const double> w, double* out) {
    for (std::size_t k = 0; k < w.size(); ++k) out[k] = slope * (w[k] + 20);
  };
}

}  // namespace

TEST_CASE("the limits of the verdict") {  // 0.1 and 0.5: common practice, no source.
  CHECK(validity_of(0) == Validity::within);
  CHECK(validity_of(0.0999) == Validity::within);
  CHECK(validity_of(0.1) == Validity::marginal);
  CHECK(validity_of(0.5) == Validity::outside);
  CHECK(validity_of(std::nan("")) == Validity::outside);
}

TEST_CASE("the table names every condition once, and every fast equation has one") {
  std::size_t count = 0;
  std::set<std::pair<std::string_view, Equation>> names;
  for (const Condition& condition : kConditions) {
    for (const Equation equation : {Equation::redfield, Equation::davies, Equation::coarse_grained, Equation::universal})
      if (concerns(condition, equation)) {
        names.insert({condition.name, equation});
        ++count;
      }
    CHECK(condition.weight > 0);
    CHECK(!condition.measure.empty());
    CHECK(!condition.meaning.empty());
    CHECK(!condition.source.empty());
  }
  CHECK(names.size() == count);
  for (const Equation equation : {Equation::redfield, Equation::davies, Equation::coarse_grained, Equation::universal})
    CHECK(!judge(qubit(equation)).conditions.empty());
  for (const Equation equation : {Equation::schroedinger, Equation::lindblad, Equation::hierarchy}) {
    CHECK(judge(qubit(equation)).conditions.empty());
    CHECK(judge(qubit(equation)).validity == Validity::within);
  }
}

// tau_B/tau_SB = c/nu^2 of an exponential, times |A|^2: closed form (Quantum 4, 227 (2020) for the two times).
TEST_CASE("memory against relaxation, two operators, one of norm 2") {
  ValidityInput in = qubit(Equation::redfield);
  in.noises = {exponential_noise(0.5, 10), exponential_noise(0.1, 5, 2)};  // tau_B/tau_SB: 0.005 and 0.016.
  const ValidityJudgement judged = judge(in);
  const ConditionRatio* memory = find(judged, ConditionKind::bath_memory);
  REQUIRE(memory);
  CHECK(memory->ratio == Approx(memory->condition->weight * (0.5 / 100 + 4 * 0.1 / 25)));
  CHECK(judged.tau_b == Approx(0.2));
  CHECK(judged.tau_sb == Approx(5 / 0.4));
  REQUIRE(judged.scales.size() == 1);
  CHECK(judged.scales[0].value == Approx(4 * 0.1 / 25));
}

TEST_CASE("the drive counts against the memory, not where the equation follows it") {
  ValidityInput in = qubit(Equation::redfield);
  in.drive = 30;
  const ValidityJudgement still = judge(in);
  REQUIRE(find(still, ConditionKind::drive_over_memory));
  CHECK(find(still, ConditionKind::drive_over_memory)->ratio == Approx(30 * 0.1 * 0.1));
  CHECK(still.validity == Validity::marginal);
  in.memory = Memory::driven;
  CHECK(!find(judge(in), ConditionKind::drive_over_memory));
  CHECK(judge(in).validity == Validity::within);
}

TEST_CASE("the window of the coarse-grained equation lies between two times") {
  ValidityInput in = qubit(Equation::coarse_grained);
  const ValidityJudgement judged = judge(in);
  CHECK(find(judged, ConditionKind::window_memory)->ratio == Approx(0.1 / 1.5));
  CHECK(find(judged, ConditionKind::window_relaxation)->ratio == Approx(1.5 * 0.03));
  in.noises[0].window = 0.05;  // Shorter than the memory.
  CHECK(judge(in).validity == Validity::outside);
  in.noises[0].window = 50;  // Longer than the relaxation.
  CHECK(judge(in).validity == Validity::outside);
}

TEST_CASE("leakage counts against the tolerance asked") {
  ValidityInput in = qubit(Equation::universal);
  in.leakage = 3e-5;
  in.tolerance = 1e-4;
  CHECK(find(judge(in), ConditionKind::leakage)->ratio == Approx(0.3));
  in.tolerance = 1e-3;
  CHECK(judge(in).validity == Validity::within);
}

TEST_CASE("the smallest spacing leaves coincidences out") {
  CHECK(smallest_spacing(Eigen::Vector2d(-3, 3)) == Approx(6));
  // Two alike qubits: frequencies 0, 5, 10 many times.
  CHECK(smallest_spacing(Eigen::Vector4d(-5, 0, 0, 5)) == Approx(5));
  CHECK(smallest_spacing(Eigen::Vector4d(-5, -0.1, 0.1, 5)) == Approx(0.2));
}

// By hand: one qubit, A = Z at an angle: the terms left out join w = 0 with w = +-Om and +Om with -Om.
TEST_CASE("the secular ratio of one qubit") {
  const double om = 4, c = 0.6, s = 0.8, slope = 0.01;
  Eigen::MatrixXcd a(2, 2);
  a << c, s, s, -c;
  const std::vector<Eigen::MatrixXcd> elements{a};
  const std::vector<Rate> rates{linear_rate(slope)};
  const SecularRatio found = secular_ratio(Eigen::Vector2d(-om / 2, om / 2), elements, rates, 1e-8);
  const double g0 = slope * 20, up = slope * (20 + om), down = slope * (20 - om);
  const double with_zero = c * s * std::sqrt(g0 * up) / om, with_each_other = s * s * std::sqrt(up * down) / (2 * om);
  CHECK(found.ratio == Approx(std::max(with_zero, with_each_other)));
  CHECK(found.rate / found.spacing == Approx(found.ratio));
}

// Frequencies that no operator has in common never meet: qubits that do not interact, nearly alike.
TEST_CASE("qubits apart are as secular as each alone") {
  const double om = 4, other = 4.001;
  Eigen::Vector4d energies(-(om + other) / 2, (om - other) / 2, (other - om) / 2, (om + other) / 2);
  // Levels: 00, 10, 01, 11 where the first has om. Flips of the first join 0-1 and 2-3, of the second 0-2 and 1-3.
  Eigen::MatrixXcd first = Eigen::MatrixXcd::Zero(4, 4), second = first;
  first(0, 2) = first(2, 0) = first(1, 3) = first(3, 1) = 1;
  second(0, 1) = second(1, 0) = second(2, 3) = second(3, 2) = 1;
  const std::vector<Eigen::MatrixXcd> elements{first, second};
  const std::vector<Rate> rates{linear_rate(0.01), linear_rate(0.01)};
  CHECK(secular_ratio(energies, elements, rates, 1e-8).ratio < 0.03);
  CHECK(smallest_spacing(energies) < 0.01);
}

TEST_CASE("heating by a window is what averaging does to two levels") {
  Eigen::MatrixXcd a(2, 2);
  a << 0, 1, 1, 0;
  const std::vector<Eigen::MatrixXcd> elements{a};
  const std::vector<Rate> exact{[](std::span<const double> w, double* out) {
    for (std::size_t k = 0; k < w.size(); ++k) out[k] = w[k] > 0 ? 0.9 : 0.1;
  }};
  const std::vector<Rate> blurred{[](std::span<const double> w, double* out) {
    for (std::size_t k = 0; k < w.size(); ++k) out[k] = w[k] > 0 ? 0.9 : 0.3;
  }};
  CHECK(window_heating(Eigen::Vector2d(-1, 1), elements, exact, exact) == 0);
  CHECK(window_heating(Eigen::Vector2d(-1, 1), elements, exact, blurred) == Approx(0.3 / 1.2 - 0.1));
}

TEST_CASE("along a run: the worst place, where the verdict changes and why") {
  std::vector<ValidityJudgement> run;
  for (int k = 0; k <= 10; ++k) {
    ValidityInput in = qubit(Equation::davies);
    in.s = k / 10.0;
    in.t = 20 * in.s;
    in.secular = k == 5 ? 0.8 : k == 6 ? 0.2 : 0.01;
    run.push_back(judge(in));
  }
  const RunValidity whole = run_validity(run);
  CHECK(whole.validity == Validity::outside);
  CHECK(whole.worst == 5);
  CHECK(whole.reason.find("`secular`") != std::string::npos);
  CHECK(whole.reason.find("s = 0.5") != std::string::npos);
  REQUIRE(whole.changes.size() == 3);
  CHECK(whole.changes[0].after == Validity::outside);
  CHECK(whole.changes[1].before == Validity::outside);
  CHECK(whole.changes[1].after == Validity::marginal);
  CHECK(whole.changes[2].after == Validity::within);
  CHECK(whole.changes[2].t == Approx(14));
  CHECK(whole.changes[2].reason.find("`secular`") != std::string::npos);
}

TEST_CASE("a row has a number for each column, whatever the equation") {
  for (const Equation equation : {Equation::redfield, Equation::davies, Equation::coarse_grained, Equation::universal, Equation::hierarchy}) {
    ValidityInput in = qubit(equation);
    in.t2 = std::nullopt;
    for (const Memory memory : {Memory::markov, Memory::driven}) {
      in.memory = memory;
      const auto columns = validity_columns(equation);
      const auto numbers = validity_numbers(judge(in), equation);
      REQUIRE(numbers.size() == columns.size());
      for (std::size_t k = 0; k < columns.size(); ++k) {
        if (columns[k].name == "T1") CHECK(numbers[k] == 40);
        if (columns[k].name == "T2") CHECK(std::isnan(numbers[k]));
        if (columns[k].name == "smallest spacing") CHECK(numbers[k] == Approx(6 / kWholeTurn));
        if (columns[k].name == "ratio drive over memory") CHECK(std::isnan(numbers[k]) == (memory == Memory::driven && equation == Equation::redfield));
      }
    }
  }
}

TEST_CASE("how far answers move with the window") {
  const std::vector<std::string> names{"missed", "energy"};
  const std::vector<double> scales{1, 50}, answers{0.2, -30}, halved{0.25, -29}, doubled{0.19, -30.2};
  const WindowChange change = window_change(names, scales, answers, halved, doubled);
  CHECK(change.halved[0] == Approx(0.05));
  CHECK(change.doubled[1] == Approx(-0.2));
  CHECK(change.largest == 0);
  CHECK(change.sentence.find("`missed`") != std::string::npos);
  CHECK(window_change({}, {}, {}, {}, {}).sentence.empty());
}
