#include "runtime/experiment/point.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "lang/support/check.h"
#include "runtime/experiment/grid.h"
#include "runtime/experiment/kinks.h"
#include "runtime/experiment/reductions.h"
#include "runtime/experiment/tables.h"
#include "runtime/experiment/validity_of_point.h"

namespace tarn::runtime {
namespace {

/// Vectors of level sets are kept between runs up to this many amplitudes.
constexpr std::size_t kKeptAmplitudes = std::size_t{1} << 24;
constexpr double kEpsilon = std::numeric_limits<double>::epsilon();
constexpr double kFirstTolerance = 0.3;  ///< Of the tolerance asked: most points need two runs then.

bool any_reading(const Plan& plan, bool (*holds)(const Reading&)) {
  for (const Observable& observable : plan.observables) {
    for (const std::uint32_t r : observable.readings) {
      if (holds(plan.readings[r])) return true;
    }
  }
  return false;
}

}  // namespace

PointTask::PointTask(const PlanModel& model, std::uint64_t index, Watch watch)
    : model_(model), plan_(model.plan()), watch_(std::move(watch)), functions_(model.functions_at(index)),
      levels_(plan_, model.kernel(), functions_, watch_.interrupted) {
  outcome_.index = index;
  const auto prepared = prepare();
  if (!prepared) fail(prepared.error());
}

Result<Done, RunError> PointTask::prepare() {
  settings_ = functions_.values(kSettings, 0, 0);
  auto timeline = work_out_pace(plan_.pace, settings_);
  if (!timeline) return Unexpected{timeline.error()};
  timeline_ = std::move(timeline).value();
  note_held_offsets();
  positions_ = kink_positions(plan_.chip.kinks, functions_);
  breaks_ = times_of_positions(timeline_, positions_);
  if (any_reading(plan_, reads_target)) {
    auto target = find_target(plan_, functions_);
    if (!target) return Unexpected{target.error()};
    target_ = std::move(target).value();
    if (!target_->diagonal) remark("H is not diagonal at s = 1: `target` is read off its diagonal");
  }
  const auto observed = prepare_observations();
  if (!observed) return observed;
  if (!any_reading(plan_, reads_state) && !plan_.distribution_at_end) {
    begin_run();
    end_best_run({}, {}, true);
    return Done{};
  }
  if (!plan_.begin || plan_.scan) {
    return Unexpected{RunError{"no_state", "an observable reads the state, but there is none without `begin` and dynamics"}};
  }
  if (plan_.choice.equation == Equation::none && !timeline_.segments.empty()) {
    return Unexpected{RunError{"no_equation", "an observable reads the state along the pace, which takes an `equation`"}};
  }
  const auto begun = find_begin();
  if (!begun) return begun;
  tolerance_ = kFirstTolerance * plan_.tolerance;
  rounding_ = kEpsilon * largest_phase();
  shared_.assign(observations_.size(), rounding_);
  wants_run_ = true;
  return Done{};
}

Result<Done, RunError> PointTask::find_begin() {
  if (!begins_steady()) {
    auto begin = begin_state(plan_, levels_, timeline_.first_s, settings_);
    if (!begin) return Unexpected{begin.error()};
    begin_ = std::move(begin).value();
    return Done{};
  }
  if (!watch_.generator.steady) return Done{};
  const auto rho = watch_.generator.steady(*this, timeline_.first_s);
  if (!rho) return Unexpected{rho.error()};
  begin_ = mixture_of(*rho);
  return Done{};
}

/// Bound on the phase that any two levels gather in the run [rad]: the rounding of energies acts on it, and it
/// on coherences.
double PointTask::largest_phase() const {
  const auto width = [&](double s, double t) {
    const std::vector<double> coefficients = functions_.values(kCoefficients, s, t);
    double sum = 0;
    for (const OperatorGroup& group : plan_.chip.hamiltonian.groups) {
      for (const WordTerm& term : group.terms) {
        if (term.word.x != 0 || term.word.z != 0) sum += 2 * std::abs(coefficients[group.coefficient] * term.factor);
      }
    }
    return sum;
  };
  double phase = 0;
  for (const Segment& segment : timeline_.segments) {
    phase += (segment.t1 - segment.t0) * std::max(width(segment.s0, segment.t0), width(segment.s1, segment.t1));
  }
  return phase;
}

void PointTask::note_held_offsets() {
  for (const std::size_t q : held_offsets(plan_.chip, timeline_, settings_)) {
    remark(fmt::format("s + offset of {} leaves [0, 1] and was held there", plan_.chip.qubits[q].path));
  }
}

Result<Done, RunError> PointTask::prepare_observations() {
  auto observations = observations_of(plan_, timeline_, settings_);
  if (!observations) return Unexpected{observations.error()};
  observations_ = std::move(observations).value();
  readings_.resize(observations_.size());
  norms_.resize(observations_.size());
  widths_.assign(observations_.size(), 0.0);
  places_.resize(plan_.observables.size());
  for (std::size_t i = 0; i < observations_.size(); ++i) {
    const double t = observations_[i].at.t;
    if (times_.empty() || t != times_.back()) {
      times_.push_back(t);
      at_time_.emplace_back();
    }
    at_time_.back().push_back(i);
    // Made now as well where they are not kept: what cannot be read should fail before the run.
    auto readings = make_readings(observations_[i]);
    if (!readings) return Unexpected{readings.error()};
    norms_[i] = readings->norms();
    note_lacking(*readings, observations_[i].at.s);
    for (const std::uint32_t o : observations_[i].observables) places_[o].push_back(i);
    const auto width = find_width(observations_[i]);
    if (!width) return Unexpected{width.error()};
    widths_[i] = *width;
    const std::size_t kept = observations_.size() << plan_.chip.qubits.size();
    if (kept <= kKeptAmplitudes) readings_[i] = std::move(readings).value();
    if (plan_.scan && watch_.share) watch_.share(static_cast<double>(i + 1) / static_cast<double>(observations_.size()));
  }
  return Done{};
}

/// What holds at many instants is said at the first.
void PointTask::note_lacking(const InstantReadings& readings, double s) {
  for (const std::string& why : readings.lacking()) {
    if (lacking_.insert(why).second) remark(fmt::format("{} (first at s = {:.4g})", why, s));
  }
}

Result<double, RunError> PointTask::find_width(const Observation& observation) {
  const bool wanted = std::any_of(observation.observables.begin(), observation.observables.end(), [&](std::uint32_t o) {
    return plan_.observables[o].scale == Scale::energy && !plan_.observables[o].readings.empty();
  });
  if (!wanted) return 0.0;
  const auto found = levels_.lowest(observation.at.s, 1);
  if (!found) return Unexpected{found.error()};
  return (*found)->width;
}

Result<InstantReadings, RunError> PointTask::make_readings(const Observation& observation) {
  if (watch_.interrupted && watch_.interrupted()) return Unexpected{RunError{"interrupted", "stopped before the end"}};
  ModeAt mode;
  if (watch_.generator.mode) mode = [this](double s, std::optional<LevelPair> pair) { return watch_.generator.mode(*this, s, pair); };
  return InstantReadings::make(plan_, readings_at(plan_, observation), observation.at, functions_, levels_, settings_,
                               target_ ? &*target_ : nullptr, mode, [this](Instant at) { return verdict_until(at); });
}

Result<double, RunError> PointTask::verdict_until(Instant at) {
  // Judged once: what moves along the run, what stands still where it is asked.
  const bool moves = !timeline_.segments.empty();
  if (!moves || !judged_) {
    auto judged = moves ? judge_run(*this, watch_.generator) : judge_instant(*this, watch_.generator, at);
    if (!judged) return Unexpected{judged.error()};
    judged_ = std::move(judged).value();
    if (!judged_->reason.empty()) remark(judged_->reason);
  }
  return static_cast<double>(judged_->until(moves ? at.t + 1e-9 * timeline_.duration() : at.t));
}

const InstantReadings* PointTask::readings_of(std::size_t observation) {
  if (!readings_[observation]) {
    auto made = make_readings(observations_[observation]);
    if (!made) {
      fail(made.error());
      return nullptr;
    }
    readings_[observation] = std::move(made).value();
  }
  return &*readings_[observation];
}

void PointTask::begin_run() {
  fine_.assign(observations_.size(), {});
  sums_.clear();
  for (std::size_t i = 0; i < observations_.size(); ++i) {
    const InstantReadings* readings = readings_of(i);
    if (readings == nullptr) return;
    sums_.push_back(readings->empty_sums());
    fine_[i].readings = readings->finish(sums_.back());
    fine_[i].probes.assign(sums_.back().probes.size(), 0.0);
  }
}

void PointTask::visit(std::size_t index, const State& state, double weight) {
  for (const std::size_t i : at_time_[index]) {
    const InstantReadings* readings = readings_of(i);
    if (readings == nullptr) return;
    readings->add(state, weight, sums_[i]);
    if (const auto* rho = std::get_if<Density>(&state)) shared_[i] = rounding_ * largest_coherence(*rho) + floor_;
    fine_[i].readings = readings->finish(sums_[i]);
    fine_[i].probes = sums_[i].probes;
    if (!observations_[i].distribution) continue;
    add_basis_populations(state, weight, fine_[i].distribution);
  }
}

PointOutcome PointTask::take_outcome() {
  outcome_.counters.decompositions += levels_.decompositions();
  return std::move(outcome_);
}

void PointTask::end_run(const Counters& counters) {
  if (outcome_.error) return;
  outcome_.counters += counters;
  const bool first = coarser_.empty();
  if (!first) {
    collect_answers();
    const double excess = worst_excess();
    if (!(excess > 1)) return finish(kStatusOk);
    if (tolerance_ * kTighter < kTightestTolerance) return finish(kStatusLoose);
  }
  tolerance_ *= kTighter;
  coarser_.clear();
  coarser_.push_back({std::move(fine_), plan_.choice.equation == Equation::schroedinger ? kOfLooserKet : kOfLooserDensity});
}

void PointTask::end_coarser_run(Weights weights) {
  if (outcome_.error) return;
  coarser_.push_back({std::move(fine_), weights});
}

void PointTask::end_best_run(const Counters& counters, std::span<const double> shared, bool last) {
  if (outcome_.error) return;
  outcome_.counters += counters;
  shared_.assign(observations_.size(), 0.0);
  for (std::size_t index = 0; index < shared.size(); ++index) {
    for (const std::size_t i : at_time_[index]) shared_[i] = shared[index];
  }
  collect_answers();
  if (!(worst_excess() > 1)) finish(kStatusOk);
  else if (last) finish(kStatusLoose);
  coarser_.clear();
}

void PointTask::fail(RunError error) {
  outcome_.series.clear();
  outcome_.distribution.clear();
  outcome_.status = fmt::format("{}: {}", error.kind, error.message);
  outcome_.error = std::move(error);
  wants_run_ = false;
}

std::vector<Comparison> PointTask::comparisons(std::size_t i) const {
  std::vector<Comparison> list;
  for (const CoarserRun& run : coarser_) list.push_back({run.snapshots[i], run.weights});
  return list;
}

Answer PointTask::answer_of(std::size_t i, std::uint32_t o) {
  const Observable& observable = plan_.observables[o];
  Answer answer = estimate_answer(fine_[i], comparisons(i), shared_[i], observable_rows(plan_, functions_, observations_[i].at),
                                  observable.row, observable.readings, norms_[i]);
  // A verdict is one of three words: `<=` must not straddle its own limit.
  const bool word = !observable.readings.empty() && std::all_of(observable.readings.begin(), observable.readings.end(), [&](std::uint32_t r) {
    return std::holds_alternative<ReadVerdict>(plan_.readings[r]);
  });
  if (word) answer.error = 0;
  return answer;
}

/// Answers of the observables that read no reduction, and the distribution.
void PointTask::collect_answers() {
  outcome_.series.assign(plan_.observables.size(), {});
  for (std::size_t i = 0; i < observations_.size(); ++i) {
    const Observation& observation = observations_[i];
    for (const std::uint32_t o : observation.observables) {
      if (reads_reduction(plan_, plan_.observables[o])) continue;
      const bool once = occurrence_of(plan_, plan_.observables[o]) == Occurrence::once;
      outcome_.series[o].push_back({once ? Instant{0, 0} : observation.at, answer_of(i, o)});
    }
    if (!observation.distribution) continue;
    outcome_.distribution.clear();
    for (std::size_t b = 0; b < fine_[i].distribution.size(); ++b) {
      outcome_.distribution.push_back(estimate_probability(fine_[i], comparisons(i), shared_[i], b));
    }
  }
}

double PointTask::limit_of(std::uint32_t o, std::size_t k) const {
  const std::vector<Sample>& series = outcome_.series[o];
  double scale = 0;
  switch (plan_.observables[o].scale) {
    case Scale::plain: return plan_.tolerance;
    case Scale::energy: scale = widths_[places_[o][k]]; break;
    case Scale::rate: scale = timeline_.duration() > 0 ? 1 / timeline_.duration() : 0; break;
    case Scale::answer:
      for (const Sample& other : series) scale = std::max(scale, std::abs(other.answer.value));
      break;
  }
  return plan_.tolerance * std::max(scale, std::abs(series[k].answer.value));
}

/// The largest error over what it may be.
double PointTask::worst_excess() const {
  double worst = 0;
  const auto weigh = [&](const Answer& answer, double limit) {
    if (answer.error > 0 && std::isfinite(answer.value)) worst = std::max(worst, answer.error / limit);
  };
  for (std::uint32_t o = 0; o < outcome_.series.size(); ++o) {
    for (std::size_t k = 0; k < outcome_.series[o].size(); ++k) weigh(outcome_.series[o][k].answer, limit_of(o, k));
  }
  for (const Answer& answer : outcome_.distribution) weigh(answer, plan_.tolerance);
  return worst;
}

/// What reductions and the readings beside them are made of: each reading with the error of its own answer.
std::vector<Measured> PointTask::readings_with_errors(std::size_t i) const {
  std::vector<Measured> readings = fine_[i].readings;
  for (std::size_t r = 0; r < readings.size(); ++r) {
    double error = 0;
    for (const CoarserRun& run : coarser_) {
      error = std::max(error, run.weights.of_difference * std::abs(readings[r].value - run.snapshots[i].readings[r].value));
    }
    readings[r].error += error + shared_[i] * norms_[i][r];
  }
  return readings;
}

void PointTask::finish(const char* status) {
  wants_run_ = false;
  outcome_.status = status;
  round_to_shown(plan_, outcome_);
  std::vector<Waiting> waiting;
  for (std::uint32_t o = 0; o < plan_.observables.size(); ++o) {
    if (!reads_reduction(plan_, plan_.observables[o])) continue;
    Waiting& next = waiting.emplace_back();
    next.observable = o;
    for (const std::size_t i : places_[o]) {
      next.readings.push_back(readings_with_errors(i));
      next.instants.push_back(observations_[i].at);
    }
  }
  complete_reductions(plan_, functions_, std::move(waiting), outcome_);
  for (const auto& series : outcome_.series) {
    for (const Sample& sample : series) {
      if (!std::isfinite(sample.answer.value)) outcome_.status = kStatusNotFinite;
    }
  }
}

}  // namespace tarn::runtime
