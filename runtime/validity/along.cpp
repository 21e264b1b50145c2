#include "runtime/validity/along.h"

#include <cmath>
#include <fmt/format.h>
#include <numbers>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

constexpr double kNone = std::numeric_limits<double>::quiet_NaN();

double worst_ratio(const ValidityJudgement& judgement) {
  return judgement.conditions.empty() ? 0.0 : judgement.conditions[judgement.worst].ratio;
}

std::string reason_of(const ValidityJudgement& at) {
  if (at.conditions.empty()) return "";
  const ConditionRatio& worst = at.conditions[at.worst];
  return fmt::format("{} at s = {:.4g}, t = {:.4g} ns by `{}` ({:.2g}): {}", validity_name(at.validity), at.s, at.t, worst.condition->name,
                     worst.ratio, worst.sentence);
}

/// The names of scales_of() in validity.cpp depend on the equation alone.
std::vector<std::string> scale_names(Equation equation) {
  ValidityInput blank;
  blank.equation = equation;
  std::vector<std::string> names;
  for (const ErrorScale& scale : judge(blank).scales) names.emplace_back(scale.name);
  return names;
}

}  // namespace

RunValidity run_validity(std::span<const ValidityJudgement> run) {
  TARN_CHECK(!run.empty());
  RunValidity whole;
  for (std::size_t k = 0; k < run.size(); ++k) {
    const double ratio = worst_ratio(run[k]), worst = worst_ratio(run[whole.worst]);
    if (ratio > worst || (std::isnan(ratio) && !std::isnan(worst))) whole.worst = k;
    if (k == 0 || run[k].validity == run[k - 1].validity) continue;
    // What made it worse is named also where it gets better: there it is what was worst before.
    const bool worse = run[k].validity > run[k - 1].validity;
    std::string reason = reason_of(run[k]);
    if (!worse) reason += fmt::format("; before, {}", reason_of(run[k - 1]));
    whole.changes.push_back({k, run[k].s, run[k].t, run[k - 1].validity, run[k].validity, std::move(reason)});
  }
  whole.validity = run[whole.worst].validity;
  whole.reason = reason_of(run[whole.worst]);
  return whole;
}

std::vector<ValidityColumn> validity_columns(Equation equation) {
  std::vector<ValidityColumn> columns{{"s", ""}, {"t", "ns"}, {"tau_SB", "ns"}, {"tau_B", "ns"}};
  if (equation == Equation::coarse_grained) columns.push_back(ValidityColumn{"window", "ns"});
  columns.push_back({"T1", "ns"});
  columns.push_back({"T2", "ns"});
  columns.push_back({"smallest spacing", "GHz"});
  for (const std::string& name : scale_names(equation)) columns.push_back({"scale " + name, ""});
  for (const Condition& condition : kConditions)
    if (concerns(condition, equation)) columns.push_back({"ratio " + std::string(condition.name), ""});
  return columns;
}

std::vector<double> validity_numbers(const ValidityJudgement& at, Equation equation) {
  std::vector<double> numbers{at.s, at.t, at.tau_sb, at.tau_b};
  if (equation == Equation::coarse_grained) numbers.push_back(at.window);
  numbers.push_back(at.t1.value_or(kNone));
  numbers.push_back(at.t2.value_or(kNone));
  numbers.push_back(at.spacing / (2 * std::numbers::pi));
  for (const ErrorScale& scale : at.scales) numbers.push_back(scale.value);
  std::size_t next = 0;
  for (const Condition& condition : kConditions) {
    if (!concerns(condition, equation)) continue;
    const bool judged = next < at.conditions.size() && at.conditions[next].condition == &condition;
    numbers.push_back(judged ? at.conditions[next++].ratio : kNone);
  }
  return numbers;
}

}  // namespace tarn::runtime
