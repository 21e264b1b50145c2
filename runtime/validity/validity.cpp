#include "runtime/validity/validity.h"

#include <algorithm>
#include <cmath>
#include <fmt/format.h>
#include <numbers>
#include <utility>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

double gigahertz(double rate) { return rate / (2 * std::numbers::pi); }

struct Ratio {
  double value = 0;  ///< Without the weight.
  std::string sentence;
};

Ratio bath_memory(const ValidityInput& in, const ValidityJudgement& of) {
  double sum = 0;
  for (const NoiseScale& noise : in.noises) sum += noise.times.tau_b / noise.tau_sb();
  return {sum, fmt::format("the bath remembers for {:.3g} ns and changes the state within {:.3g} ns", of.tau_b, of.tau_sb)};
}

Ratio drive_over_memory(const ValidityInput& in, const ValidityJudgement& of) {
  return {in.drive * of.tau_b * of.tau_b, fmt::format("while the bath remembers ({:.3g} ns) the Hamiltonian moves by {:.3g} GHz", of.tau_b,
                                                       gigahertz(in.drive * of.tau_b))};
}

Ratio secular(const ValidityInput& in, const ValidityJudgement& of) {
  return {in.secular, fmt::format("jumps that are taken apart interfere: the fastest decay is {:.3g}/ns, the narrowest spacing of frequencies "
                                  "{:.3g} GHz",
                                  in.largest_rate, gigahertz(of.spacing))};
}

Ratio window_memory(const ValidityInput& in, const ValidityJudgement&) {
  Ratio worst;
  for (const NoiseScale& noise : in.noises) {
    const double ratio = noise.times.tau_b / noise.window;
    if (ratio < worst.value || noise.times.tau_b == 0) continue;
    worst = {ratio, fmt::format("the bath remembers for {:.3g} ns, the window is {:.3g} ns", noise.times.tau_b, noise.window)};
  }
  if (worst.sentence.empty()) worst.sentence = "the bath remembers nothing";
  return worst;
}

Ratio window_relaxation(const ValidityInput& in, const ValidityJudgement& of) {
  return {of.window * in.largest_rate, fmt::format("the window is {:.3g} ns, the fastest decay takes {:.3g} ns", of.window,
                                                    in.largest_rate > 0 ? 1 / in.largest_rate : kInfinity)};
}

Ratio window_heating(const ValidityInput& in, const ValidityJudgement& of) {
  return {in.heating, fmt::format("averaging over {:.3g} ns moves the balance of two levels by {:.2g}", of.window, in.heating)};
}

Ratio drive_over_window(const ValidityInput& in, const ValidityJudgement& of) {
  return {in.drive * of.window * of.tau_b,
          fmt::format("within the window ({:.3g} ns) the Hamiltonian moves by {:.3g} GHz, and the bath remembers for {:.3g} ns", of.window,
                      gigahertz(in.drive * of.window), of.tau_b)};
}

Ratio leakage(const ValidityInput& in, const ValidityJudgement&) {
  return {in.leakage / in.tolerance,
          fmt::format("a population of {:.2g} has left the levels kept, {:.2g} is the tolerance", in.leakage, in.tolerance)};
}

Ratio ratio_of(ConditionKind kind, const ValidityInput& in, const ValidityJudgement& of) {
  switch (kind) {
    case ConditionKind::bath_memory: return bath_memory(in, of);
    case ConditionKind::drive_over_memory: return drive_over_memory(in, of);
    case ConditionKind::secular: return secular(in, of);
    case ConditionKind::window_memory: return window_memory(in, of);
    case ConditionKind::window_relaxation: return window_relaxation(in, of);
    case ConditionKind::window_heating: return window_heating(in, of);
    case ConditionKind::drive_over_window: return drive_over_window(in, of);
    case ConditionKind::leakage: return leakage(in, of);
  }
  TARN_CHECK(false);
  return {};
}

bool applies(const Condition& condition, const ValidityInput& in) {
  const bool follows_drive = in.equation == Equation::redfield && in.memory == Memory::driven;
  return concerns(condition, in.equation) && !(follows_drive && condition.kind == ConditionKind::drive_over_memory);
}

/// Those of Quantum 4, 227 (2020) for this equation.
std::vector<ErrorScale> scales_of(const ValidityInput& in) {
  double memory = 0, spacing = kInfinity, secular = 0;
  for (Eigen::Index k = 1; k < in.energies.size(); ++k)
    if (const double gap = in.energies[k] - in.energies[k - 1]; gap > 0) spacing = std::min(spacing, gap);
  for (const NoiseScale& noise : in.noises) {
    memory = std::max(memory, noise.times.tau_b / noise.tau_sb());
    secular = std::max(secular, 1 / std::sqrt(noise.tau_sb() * spacing));
  }
  if (in.equation == Equation::redfield || in.equation == Equation::universal) return {{"tau_B/tau_SB", memory}};
  if (in.equation == Equation::coarse_grained) return {{"sqrt(tau_B/tau_SB)", std::sqrt(memory)}};
  if (in.equation == Equation::davies) return {{"sqrt(tau_B/tau_SB) + 1/sqrt(tau_SB dE)", std::sqrt(memory) + secular}};
  return {};
}

}  // namespace

Validity validity_of(double ratio) {
  if (ratio < kWithin) return Validity::within;
  return ratio < kMarginal ? Validity::marginal : Validity::outside;
}

std::string_view validity_name(Validity validity) {
  switch (validity) {
    case Validity::within: return "within";
    case Validity::marginal: return "marginal";
    case Validity::outside: return "outside";
  }
  return "";
}

double smallest_spacing(const Eigen::VectorXd& energies) {
  std::vector<double> w;
  for (Eigen::Index m = 0; m < energies.size(); ++m)
    for (Eigen::Index n = 0; n < energies.size(); ++n) w.push_back(energies[m] - energies[n]);
  std::sort(w.begin(), w.end());
  double smallest = kInfinity;
  for (std::size_t k = 1; k < w.size(); ++k)
    if (const double step = w[k] - w[k - 1]; step > 1e-8 * w.back()) smallest = std::min(smallest, step);
  return smallest;
}

ValidityJudgement judge(const ValidityInput& in) {
  TARN_CHECK(in.tolerance > 0);
  ValidityJudgement judged;
  judged.s = in.s;
  judged.t = in.t;
  judged.t1 = in.t1;
  judged.t2 = in.t2;
  judged.spacing = smallest_spacing(in.energies);
  for (const NoiseScale& noise : in.noises) {
    judged.tau_sb = std::min(judged.tau_sb, noise.tau_sb());
    judged.tau_b = std::max(judged.tau_b, noise.times.tau_b);
    judged.window = std::max(judged.window, noise.window);
  }
  for (const Condition& condition : kConditions) {
    if (!applies(condition, in)) continue;
    Ratio ratio = ratio_of(condition.kind, in, judged);
    ratio.value *= condition.weight;
    judged.conditions.push_back({&condition, ratio.value, validity_of(ratio.value), std::move(ratio.sentence)});
    const auto above = [](double a, double b) { return a > b || (std::isnan(a) && !std::isnan(b)); };
    if (above(ratio.value, judged.conditions[judged.worst].ratio)) judged.worst = judged.conditions.size() - 1;
  }
  if (!judged.conditions.empty()) judged.validity = judged.conditions[judged.worst].validity;
  judged.scales = scales_of(in);
  return judged;
}

}  // namespace tarn::runtime
