#include "runtime/integrate/explicit.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstring>
#include <limits>

#include "lang/support/check.h"
#include "runtime/integrate/pair853.h"
#include "runtime/integrate/step_control.h"

namespace tarn::runtime {
namespace {

using pair853::kTable;

// Rows of vectors_.
constexpr std::size_t kState = 0, kFirstStage = 1, kNext = kFirstStage + pair853::kStages,
                      kArgument = kNext + 1, kRows = kArgument + 1;
constexpr std::size_t kEndStage = 12;
/// From so many doubles on, a stage takes a good part of a millisecond: it is asked before each whether to stop.
constexpr std::size_t kLongStage = std::size_t{1} << 18;
/// What the integral part of the control remembers of a step far better than needed: log(1e-4).
constexpr double kLeastLogRatio = -9.2;
/// Stages that only the interpolant needs.
constexpr std::array<std::size_t, 3> kInterpolantStages = {13, 14, 15};

/// The shortest step that the clock resolves near t.
double resolution(double t, double end) {
  return 16 * std::numeric_limits<double>::epsilon() * std::max(std::abs(t), std::abs(end));
}

/// Error that one step may make. A floor lets steps pass over a jump of f, where the error falls no
/// faster than the step; a step of the `shortest` length may use all.
double granted(const LaneTask& task, double step, double shortest) {
  constexpr double kFullGrants = 128, kLeastGrant = 1.0 / 256;
  if (step <= shortest) return task.tolerance;
  const double duration =
      task.duration > 0 ? task.duration : task.boundaries.back() - task.boundaries.front();
  return task.tolerance * std::clamp(kFullGrants * step / duration, kLeastGrant, 1.0);
}

}  // namespace

ExplicitIntegrator::ExplicitIntegrator(std::size_t size, std::size_t lanes, Phase phase)
    : size_(size), width_(lanes), phase_(phase), vectors_(kRows), lanes_(lanes), pieces_(lanes) {
  TARN_CHECK(size > 0 && lanes > 0 && 8 % lanes == 0);
  vectors_[kState] = AlignedArray(size_ * width_);
  length_ = vectors_[kState].size();
  node_times_.resize(pair853::kStages * width_);
  weights_ = AlignedArray(kMostVectors * width_ + kPackWidth);
}

double* ExplicitIntegrator::row(std::size_t index) {
  if (vectors_[index].size() == 0) vectors_[index] = AlignedArray(length_);
  return vectors_[index].data();
}

double* ExplicitIntegrator::stage_row(std::size_t stage) { return row(kFirstStage + stage); }

std::vector<std::optional<Failure>> ExplicitIntegrator::run(const RightHandSide& f,
                                                            std::span<const LaneTask> tasks,
                                                            const OnTime& on_time,
                                                            const Interrupted& interrupted) {
  TARN_CHECK(tasks.size() == width_);
  start(tasks, on_time);
  while (any_active()) {
    if (interrupted && interrupted()) {
      stop_all(FailureKind::interrupted);
      break;
    }
    refresh(f, tasks);
    follow_energy();
    choose_steps(tasks);
    bool goes_on = attempt(f, interrupted);
    if (goes_on) judge(tasks);
    goes_on = goes_on && interpolate(f, tasks, on_time, interrupted);
    if (!goes_on) {
      stop_all(FailureKind::interrupted);
      break;
    }
    advance(tasks, on_time);
  }
  settle_phases(tasks);
  std::vector<std::optional<Failure>> result;
  for (const Lane& lane : lanes_) result.push_back(lane.failure);
  return result;
}

void ExplicitIntegrator::start(std::span<const LaneTask> tasks, const OnTime& on_time) {
  for (std::size_t l = 0; l < width_; ++l) {
    Lane& lane = lanes_[l];
    const LaneTask& task = tasks[l];
    lane.piece = lane.next_time = 0;
    lane.trial = 0;
    lane.failure.reset();
    lane.active = lane.fresh = task.boundaries.size() >= 2;
    if (task.boundaries.empty()) continue;
    lane.t = task.boundaries.front();
    report_until(l, task, on_time);
  }
}

bool ExplicitIntegrator::any_active() const {
  return std::any_of(lanes_.begin(), lanes_.end(), [](const Lane& lane) { return lane.active; });
}

void ExplicitIntegrator::fail(Lane& lane, FailureKind kind) {
  lane.failure = Failure{kind, lane.t};
  lane.active = lane.accepted = false;
  lane.trial = 0;
}

void ExplicitIntegrator::stop_all(FailureKind kind) {
  for (Lane& lane : lanes_)
    if (lane.active) fail(lane, kind);
}

/// Announces the times t + c trial of every lane; a lane whose coefficients are not finite fails.
void ExplicitIntegrator::announce(const RightHandSide& f, std::span<const double> c) {
  for (std::size_t node = 0; node < c.size(); ++node)
    for (std::size_t l = 0; l < width_; ++l)
      node_times_[node * width_ + l] = c[node] == 1 && lanes_[l].ends_piece
                                           ? lanes_[l].next_t
                                           : lanes_[l].t + c[node] * lanes_[l].trial;
  for (std::size_t l = 0; l < width_; ++l) pieces_[l] = lanes_[l].piece;
  std::array<bool, 8> bad{};
  f.nodes({c.size(), std::span(node_times_).first(c.size() * width_), pieces_}, bad.data());
  for (std::size_t l = 0; l < width_; ++l)
    if (bad[l] && lanes_[l].active) fail(lanes_[l], FailureKind::not_finite);
}

/// Derivative of one stage; its argument goes to `argument`.
void ExplicitIntegrator::evaluate(const RightHandSide& f, std::size_t stage, std::size_t node,
                                  double* argument) {
  std::array<const double*, kMostVectors> vectors = {row(kState)};
  std::size_t count = 1;
  std::fill_n(weights_.data(), width_, 1.0);
  for (std::size_t j = 0; j < stage; ++j) {
    if (kTable.a[stage][j] == 0) continue;
    vectors[count] = stage_row(j);
    // Eight at once; what goes beyond the lanes is overwritten next.
    const Pack weights = kTable.a[stage][j] * trials_;
    std::memcpy(weights_.data() + count++ * width_, &weights, sizeof weights);
  }
  f.stage(node, count, weights_.data(), vectors.data(), argument, stage_row(stage));
  if (phase_ == Phase::comoving) add_turned(length_, energies_, argument, stage_row(stage));
  for (Lane& lane : lanes_) lane.counters.evaluations += lane.active ? 1 : 0;
}

/// The derivative where a lane starts or has crossed a boundary, and the first guess of its step.
void ExplicitIntegrator::refresh(const RightHandSide& f, std::span<const LaneTask> tasks) {
  std::array<bool, 8> take{};
  for (std::size_t l = 0; l < width_; ++l) take[l] = lanes_[l].active && lanes_[l].fresh;
  if (std::none_of(take.begin(), take.end(), [](bool b) { return b; })) return;
  for (Lane& lane : lanes_) {
    lane.trial = 0;
    lane.ends_piece = false;
  }
  constexpr std::array<double, 1> here = {0};
  announce(f, here);
  const double* y = row(kState);
  std::fill_n(weights_.data(), width_, 1.0);
  double* derivative = width_ == 1 ? stage_row(0) : row(kNext);
  f.stage(0, 1, weights_.data(), &y, row(kArgument), derivative);
  if (width_ > 1) copy_lanes(length_, width_, take.data(), derivative, stage_row(0));
  std::array<double, 8> state_squares{}, slope_squares{};
  squares(length_, width_, y, state_squares.data());
  squares(length_, width_, stage_row(0), slope_squares.data());
  for (std::size_t l = 0; l < width_; ++l) {
    Lane& lane = lanes_[l];
    if (!take[l] || !lane.active) continue;
    ++lane.counters.evaluations;
    lane.fresh = false;
    lane.energy = 0;
    if (lane.step > 0) continue;
    const double length = tasks[l].boundaries[lane.piece + 1] - lane.t;
    const double rate = std::sqrt(slope_squares[l] / std::max(state_squares[l], 1e-300));
    lane.step = rate > 0 ? std::min(length, std::pow(tasks[l].tolerance, 0.125) / rate) : length / 16;
  }
}

/// Moves every lane to the mean energy of its state. Lanes do so before each trial, whatever others do.
void ExplicitIntegrator::follow_energy() {
  if (phase_ == Phase::fixed) return;
  std::array<double, 8> changes{}, energies{};
  mean_energies(length_, width_, row(kState), stage_row(0), changes.data());
  add_turned(length_, turn_weights(width_, changes.data()), row(kState), stage_row(0));
  for (std::size_t l = 0; l < width_; ++l) energies[l] = lanes_[l].energy += changes[l];
  energies_ = turn_weights(width_, energies.data());
}

/// The states with their phases; valid until the next stage is evaluated.
const double* ExplicitIntegrator::solution() {
  if (phase_ == Phase::fixed) return row(kState);
  std::array<std::complex<double>, 8> phases;
  for (std::size_t l = 0; l < width_; ++l) phases[l] = lanes_[l].phase;
  turn(length_, width_, phases.data(), row(kState), row(kArgument));
  return row(kArgument);
}

/// Puts the phases into the states of the lanes that had a task.
void ExplicitIntegrator::settle_phases(std::span<const LaneTask> tasks) {
  if (phase_ == Phase::fixed) return;
  std::array<bool, 8> take{};
  for (std::size_t l = 0; l < width_; ++l) take[l] = tasks[l].boundaries.size() >= 2;
  copy_lanes(length_, width_, take.data(), solution(), row(kState));
  for (Lane& lane : lanes_) lane.phase = 1;
}

void ExplicitIntegrator::choose_steps(std::span<const LaneTask> tasks) {
  for (std::size_t l = 0; l < width_; ++l) {
    Lane& lane = lanes_[l];
    lane.ends_piece = lane.accepted = false;
    lane.trial = 0;
    if (!lane.active) continue;
    const double end = tasks[l].boundaries[lane.piece + 1], left = end - lane.t;
    lane.ends_piece = lane.step * (1 + 1e-9) >= left;
    // Two equal steps rather than one and a splinter.
    lane.trial = lane.ends_piece ? left : std::min(lane.step, std::max(left / 2, resolution(lane.t, end)));
    lane.next_t = lane.ends_piece ? end : lane.t + lane.trial;
  }
}

bool ExplicitIntegrator::stops_within(const Interrupted& interrupted) const {
  return length_ >= kLongStage && interrupted && interrupted();
}

/// False if asked to stop on the way.
bool ExplicitIntegrator::attempt(const RightHandSide& f, const Interrupted& interrupted) {
  trials_ = Pack{};
  for (std::size_t l = 0; l < width_; ++l) trials_[l] = lanes_[l].trial;
  announce(f, std::span(kTable.c).subspan(1, pair853::kStepStages - 1));
  for (std::size_t stage = 1; stage < pair853::kStepStages; ++stage) {
    if (stops_within(interrupted)) return false;
    evaluate(f, stage, stage - 1, row(kArgument));
  }
  evaluate(f, kEndStage, kEndStage - 2, row(kNext));
  return true;
}

void ExplicitIntegrator::judge(std::span<const LaneTask> tasks) {
  std::array<const double*, kMostVectors> vectors;
  std::array<double, kMostVectors * 8> weights3, weights5;
  std::size_t count = 0;
  for (std::size_t j = 0; j < pair853::kStepStages; ++j) {
    if (kTable.error3[j] == 0 && kTable.error5[j] == 0) continue;
    vectors[count] = stage_row(j);
    std::fill_n(weights3.begin() + static_cast<std::ptrdiff_t>(count * width_), width_, kTable.error3[j]);
    std::fill_n(weights5.begin() + static_cast<std::ptrdiff_t>(count * width_), width_, kTable.error5[j]);
    ++count;
  }
  std::array<double, 8> e3{}, e5{};
  combined_squares(length_, width_, std::span(vectors).first(count), weights3.data(), weights5.data(),
                   e3.data(), e5.data());
  // Measured on 48 random anneals: with 0.1 errors of a comoving run reach 65 tolerances, with this 8.
  const double share = phase_ == Phase::comoving ? 0.1 / 8 : 0.1;
  for (std::size_t l = 0; l < width_; ++l) {
    Lane& lane = lanes_[l];
    if (!lane.active) continue;
    const double error = lane.trial * blended_error(std::sqrt(e5[l]), std::sqrt(e3[l]), share);
    const double shortest = resolution(lane.t, tasks[l].boundaries.back());
    judge_lane(lane, error / granted(tasks[l], lane.trial, shortest), shortest);
  }
}

void ExplicitIntegrator::judge_lane(Lane& lane, double ratio, double shortest) {
  lane.accepted = ratio <= 1;
  if (lane.accepted) {
    ++lane.counters.steps;
    const double log_ratio = std::log(std::max(ratio, 1e-30));
    double growth = growth_after_success(log_ratio, lane.last_log_ratio);
    if (lane.just_rejected) growth = std::min(growth, 1.0);
    const double proposal = lane.trial * growth;
    lane.step = lane.trial < lane.step ? std::max(lane.step, proposal) : proposal;
    lane.last_log_ratio = std::max(log_ratio, kLeastLogRatio);
    lane.just_rejected = false;
    return;
  }
  ++lane.counters.rejected;
  lane.just_rejected = true;
  if (lane.trial <= shortest)
    return fail(lane, std::isfinite(ratio) ? FailureKind::step_underflow : FailureKind::not_finite);
  lane.step = std::max(lane.trial * shrink_after_failure(ratio), shortest);
}

/// Reports the requested times that lie inside the accepted steps, one for each lane in a round. False if asked to
/// stop on the way.
bool ExplicitIntegrator::interpolate(const RightHandSide& f, std::span<const LaneTask> tasks,
                                     const OnTime& on_time, const Interrupted& interrupted) {
  const auto wanted = [&](std::size_t l) {
    const Lane& lane = lanes_[l];
    return lane.accepted && lane.next_time < tasks[l].times.size() &&
           tasks[l].times[lane.next_time] < lane.next_t;
  };
  const auto any_wanted = [&] {
    for (std::size_t l = 0; l < width_; ++l)
      if (wanted(l)) return true;
    return false;
  };
  if (!any_wanted()) return true;
  announce(f, std::span(kTable.c).subspan(kInterpolantStages.front(), kInterpolantStages.size()));
  for (const std::size_t stage : kInterpolantStages)
    evaluate(f, stage, stage - kInterpolantStages.front(), row(kArgument));
  while (any_wanted()) {
    if (stops_within(interrupted)) return false;
    std::array<double, 8> x{};
    for (std::size_t l = 0; l < width_; ++l)
      if (wanted(l)) x[l] = (tasks[l].times[lanes_[l].next_time] - lanes_[l].t) / lanes_[l].trial;
    combine_interpolant(x.data());
    if (phase_ == Phase::comoving) {
      std::array<std::complex<double>, 8> phases;
      for (std::size_t l = 0; l < width_; ++l)
        phases[l] = lanes_[l].phase * std::polar(1.0, -lanes_[l].energy * x[l] * lanes_[l].trial);
      turn(length_, width_, phases.data(), row(kArgument), row(kArgument));
    }
    for (std::size_t l = 0; l < width_; ++l)
      if (wanted(l)) on_time(l, lanes_[l].next_time++, row(kArgument));
  }
  return true;
}

/// argument = the interpolant at t + x trial, each lane at its own x.
void ExplicitIntegrator::combine_interpolant(const double* x) {
  std::array<const double*, kMostVectors> vectors;
  std::fill_n(weights_.data(), width_, 1.0);
  vectors[0] = row(kState);
  std::size_t count = 1;
  for (std::size_t j = 0; j < pair853::kStages; ++j) {
    if (j >= 1 && j <= 4) continue;  // The interpolant does not use them.
    vectors[count] = stage_row(j);
    for (std::size_t l = 0; l < width_; ++l)
      weights_.data()[count * width_ + l] = lanes_[l].trial * pair853::interpolant_weights(x[l])[j];
    ++count;
  }
  combine(length_, width_, std::span(vectors).first(count), weights_.data(), row(kArgument));
}

void ExplicitIntegrator::advance(std::span<const LaneTask> tasks, const OnTime& on_time) {
  std::array<bool, 8> take{};
  bool every = true;
  for (std::size_t l = 0; l < width_; ++l) {
    take[l] = lanes_[l].accepted;
    every = every && take[l];
  }
  if (every) {
    std::swap(vectors_[kState], vectors_[kNext]);
    std::swap(vectors_[kFirstStage], vectors_[kFirstStage + kEndStage]);
  } else {
    copy_lanes(length_, width_, take.data(), row(kNext), row(kState));
    copy_lanes(length_, width_, take.data(), stage_row(kEndStage), stage_row(0));
  }
  for (std::size_t l = 0; l < width_; ++l) {
    Lane& lane = lanes_[l];
    if (!lane.accepted) continue;
    lane.phase *= std::polar(1.0, -lane.energy * lane.trial);
    lane.t = lane.next_t;
    if (lane.ends_piece) {
      ++lane.piece;
      lane.fresh = true;
      lane.active = lane.piece + 1 < tasks[l].boundaries.size();
    }
    report_until(l, tasks[l], on_time);
  }
}

/// Reports the requested times up to the present one, where the state is known.
void ExplicitIntegrator::report_until(std::size_t l, const LaneTask& task, const OnTime& on_time) {
  Lane& lane = lanes_[l];
  while (lane.next_time < task.times.size() && task.times[lane.next_time] <= lane.t)
    on_time(l, lane.next_time++, solution());
}

}  // namespace tarn::runtime
