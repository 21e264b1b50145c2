#include "runtime/experiment/validity_of_point.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <functional>

#include "runtime/experiment/bath_of_plan.h"
#include "runtime/experiment/chip_family.h"
#include "runtime/experiment/noise_of_point.h"
#include "runtime/levels/track.h"
#include "runtime/linear/eigensystem.h"
#include "runtime/validity/along.h"
#include "runtime/validity/secular.h"
#include "runtime/validity/window.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
constexpr std::size_t kJudgedInstants = 21;

using RateFunction = std::function<void(std::span<const double>, double*)>;

/// Half the distance of the outer eigenvalues.
template <class Scalar>
double norm_of(const Matrix<Scalar>& hermitian) {
  const Eigen::VectorXd e = eigensystem(hermitian).values;
  return 0.5 * (e[e.size() - 1] - e[0]);
}

double slope_at(const Timeline& timeline, double t) {
  for (const Segment& segment : timeline.segments) {
    if (t <= segment.t1) return (segment.s1 - segment.s0) / (segment.t1 - segment.t0);
  }
  return 0;
}

/// What the baths of the noise operators are, wherever the run is.
struct NoiseHere {
  std::vector<NoiseScale> scales;
  std::vector<RateFunction> rates, averaged;
};

RateFunction rate_of(const std::shared_ptr<const ThermalBath>& bath) {
  return [bath](std::span<const double> w, double* out) {
    const auto n = static_cast<Eigen::Index>(w.size());
    Eigen::Map<Eigen::ArrayXd>(out, n) = bath->rate(Eigen::Map<const Eigen::ArrayXd>(w.data(), n));
  };
}

/// The mean of gamma that a window takes.
RateFunction averaged_rate_of(const ThermalBath& bath, double window, double width) {
  const auto pair = std::make_shared<const PairFunctions>(averaged_pair(bath, window, width));
  return [pair](std::span<const double> w, double* out) {
    const Eigen::MatrixXd u = pair->rate.factors(w);
    Eigen::Map<Eigen::VectorXd>(out, u.rows()) = u.cwiseAbs2() * pair->rate.values();
  };
}

template <class Scalar>
class Judge {
 public:
  Judge(PointTask& task, const GeneratorAt& generator, const HamiltonianFamily& family, NoiseHere noise)
      : task_(task), generator_(generator), model_(dense_levels<Scalar>(family)), noise_(std::move(noise)) {
    unit_ = Matrix<Scalar>::Identity(model_.dimension, model_.dimension);
  }

  ValidityJudgement at(Instant instant) {
    const Plan& plan = task_.model().plan();
    ValidityInput input;
    input.equation = plan.choice.equation;
    input.memory = plan.choice.memory;
    input.s = instant.s;
    input.t = instant.t;
    input.tolerance = plan.tolerance;
    input.noises = noise_.scales;
    const Eigen::Index kept = plan.levels ? std::min<Eigen::Index>(*plan.levels, model_.dimension) : model_.dimension;
    const Frame<Scalar> frame = model_.solve(instant.s, kept);
    input.energies = frame.energies;
    std::vector<Eigen::MatrixXcd> elements;
    for (std::size_t c = 0; c < noise_.scales.size(); ++c) {
      input.noises[c].norm = norm_of<Scalar>(model_.coupling(c, instant.s, unit_));
      elements.push_back(coupling_elements(model_, c, frame).template cast<Complex>());
    }
    const double slope = std::abs(slope_at(task_.timeline(), instant.t));
    if (slope > 0) input.drive = norm_of<Scalar>(model_.slope(instant.s, unit_)) * slope;
    input.t1 = time_of(instant.s, std::nullopt);
    input.t2 = time_of(instant.s, LevelPair{0, 1});
    for (const auto& time : {input.t1, input.t2}) {
      if (time && *time > 0) input.largest_rate = std::max(input.largest_rate, 1 / *time);
    }
    const double width = frame.energies[frame.energies.size() - 1] - frame.energies[0];
    input.secular = secular_ratio(frame.energies, elements, noise_.rates, 1e-8 * width).ratio;
    if (!noise_.averaged.empty()) input.heating = window_heating(frame.energies, elements, noise_.rates, noise_.averaged);
    return judge(input);
  }

 private:
  std::optional<double> time_of(double s, std::optional<LevelPair> pair) {
    if (!generator_.mode || model_.dimension < 2) return std::nullopt;
    const auto mode = generator_.mode(task_, s, pair);
    if (!mode) return std::nullopt;
    return 1 / mode->rate;
  }

  PointTask& task_;
  const GeneratorAt& generator_;
  LevelModel<Scalar> model_;
  NoiseHere noise_;
  Matrix<Scalar> unit_;
};

Result<NoiseHere, RunError> noise_of(const PointTask& task, const NoiseOperators& operators, const ThermalBaths& baths,
                                 std::span<const double> windows, double width) {
  const Plan& plan = task.model().plan();
  NoiseHere noise;
  std::vector<BathTimes> times;
  for (std::uint32_t b = 0; b < baths.size(); ++b) {
    const auto found = bath_times_of_run(plan, b, *baths[b], task.timeline().duration());
    if (!found) return Unexpected{found.error()};
    times.push_back(*found);
  }
  for (std::size_t c = 0; c < operators.ops.size(); ++c) {
    const std::uint32_t bath = operators.bath[c];
    noise.scales.push_back({1, times[bath], windows.empty() ? 0.0 : windows[c]});
    noise.rates.push_back(rate_of(baths[bath]));
    if (!windows.empty()) noise.averaged.push_back(averaged_rate_of(*baths[bath], windows[c], width));
  }
  return noise;
}

template <class Scalar>
Result<std::vector<ValidityJudgement>, RunError> judged(PointTask& task, const GeneratorAt& generator, const HamiltonianFamily& family,
                                                        NoiseHere noise, std::span<const Instant> instants) {
  Judge<Scalar> judge_of(task, generator, family, std::move(noise));
  std::vector<ValidityJudgement> list;
  for (const Instant& instant : instants) list.push_back(judge_of.at(instant));
  return list;
}

Result<std::vector<ValidityJudgement>, RunError> judge_point(PointTask& task, const GeneratorAt& generator,
                                                             std::span<const Instant> instants) {
  const Plan& plan = task.model().plan();
  const std::shared_ptr<const Functions> functions = functions_of(task);
  const auto operators = independent_noise(plan, task.settings());
  if (!operators) return Unexpected{operators.error()};
  const auto baths = fast_baths(plan, task.settings(), functions);
  if (!baths) return Unexpected{baths.error()};
  RangeOfS range = followed_range(task.timeline());
  for (const Instant& instant : instants) range = {std::min(range.lowest, instant.s), std::max(range.highest, instant.s)};
  const auto windows = windows_of(plan, *operators, *baths, *functions, range, task);
  if (!windows) return Unexpected{windows.error()};
  const HamiltonianFamily family = family_of(task.model(), functions, *operators, task.positions());
  auto noise = noise_of(task, *operators, *baths, *windows, frequency_bound(task.model(), *functions, range));
  if (!noise) return Unexpected{noise.error()};
  if (is_real(family)) return judged<double>(task, generator, family, *std::move(noise), instants);
  return judged<Complex>(task, generator, family, *std::move(noise), instants);
}

bool has_conditions(Equation equation) {
  return std::any_of(std::begin(kConditions), std::end(kConditions), [&](const Condition& each) { return concerns(each, equation); });
}

Result<PointVerdict, RunError> verdict_of(PointTask& task, const GeneratorAt& generator, std::span<const Instant> instants) {
  const EquationChoice& choice = task.model().plan().choice;
  PointVerdict verdict;
  if (!has_conditions(choice.equation)) return verdict;
  const auto judged = judge_point(task, generator, instants);
  if (!judged) return Unexpected{judged.error()};
  for (const ValidityJudgement& judgement : *judged) verdict.at.emplace_back(judgement.t, judgement.validity);
  const RunValidity run = run_validity(*judged);
  const ValidityJudgement& worst_place = (*judged)[run.worst];
  if (run.validity == Validity::within || worst_place.conditions.empty()) return verdict;
  const ConditionRatio& worst = worst_place.conditions[worst_place.worst];
  verdict.reason = fmt::format("{} is {}, worst at s = {:.4g} by `{}` ({:.2g}): {}",
                               choice.label.empty() ? equation_word(choice.equation) : choice.label, validity_name(run.validity),
                               worst_place.s, worst.condition->name, worst.ratio, worst.sentence);
  return verdict;
}

}  // namespace

Result<PointVerdict, RunError> judge_run(PointTask& task, const GeneratorAt& generator) {
  return verdict_of(task, generator, even_instants(task.timeline(), kJudgedInstants));
}

Result<PointVerdict, RunError> judge_instant(PointTask& task, const GeneratorAt& generator, Instant at) {
  return verdict_of(task, generator, {&at, 1});
}

}  // namespace tarn::runtime
