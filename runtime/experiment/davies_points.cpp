#include "runtime/experiment/davies_points.h"

#include <fmt/format.h>

#include <algorithm>
#include <bit>
#include <cmath>
#include <set>

#include "lang/support/check.h"
#include "runtime/bath/shift.h"
#include "runtime/equation/davies_refinement.h"
#include "runtime/experiment/bath_of_plan.h"
#include "runtime/experiment/memory.h"
#include "runtime/experiment/words.h"

namespace tarn::runtime {
namespace {

constexpr double kOfAvailable = 0.3;   ///< Of the memory there is: what tracks and tables may keep.
constexpr double kUsualMemory = 4e9;   ///< Where the system does not tell.
constexpr double kOfDistance = 0.03;  ///< Error of an answer over what the distance of the states could do to it.
constexpr std::size_t kKeySamples = 257;
constexpr double kNarrowest = 0.02;  ///< A track covers at least so much of s.

std::vector<double> key_positions() {
  std::vector<double> s(kKeySamples);
  for (std::size_t i = 0; i < kKeySamples; ++i) s[i] = static_cast<double>(i) / (kKeySamples - 1);
  return s;
}

/// Rows of the coefficients of H and of the noise operators.
std::set<std::uint32_t> tracked_rows(const Plan& plan) {
  std::set<std::uint32_t> rows;
  const auto collect = [&](const OperatorSum& sum) {
    for (const OperatorGroup& group : sum.groups) rows.insert(group.coefficient);
  };
  collect(plan.chip.hamiltonian);
  for (const Coupling& coupling : plan.chip.couplings) collect(coupling.op);
  return rows;
}

HamiltonianFamily family_of(const PlanModel& model, std::shared_ptr<const Functions> functions,
                            std::span<const double> kinks) {
  const Chip& chip = model.plan().chip;
  HamiltonianFamily family;
  family.qubits = static_cast<int>(chip.qubits.size());
  family.rows = model.kernel().rows(kCoefficients);
  family.hamiltonian = chip.hamiltonian;
  for (const Coupling& coupling : chip.couplings) family.couplings.push_back(coupling.op);
  family.coefficients = [functions](std::span<const double> s, double* out) {
    const std::vector<double> values = functions->along(kCoefficients, s);
    std::copy(values.begin(), values.end(), out);
  };
  family.derivative = [functions](std::span<const double> s, double* out) {
    const std::vector<double> values = functions->slopes_along(kCoefficients, s);
    std::copy(values.begin(), values.end(), out);
  };
  family.breaks.assign(kinks.begin(), kinks.end());
  return family;
}

TrackOptions track_options(const PointTask& task) {
  TrackOptions options;
  const RangeOfS range = range_of_s(task.timeline());
  options.s_min = range.lowest;
  options.s_max = range.highest;
  if (const double missing = kNarrowest - (range.highest - range.lowest); missing > 0) {
    options.s_min = std::max(0.0, range.lowest - missing);
    options.s_max = std::min(1.0, range.highest + missing);
  }
  if (task.model().plan().levels) {
    options.levels = static_cast<Eigen::Index>(*task.model().plan().levels);
    // Where the cut between kept and left out levels is crossed, nodes gain nothing.
    options.max_intervals = 2000;
  }
  return options;
}

/// gamma and S of every coupling's bath, good for frequencies up to `width`.
Result<std::vector<BathFunctions>, RunError> baths_of(const PointTask& task, std::shared_ptr<const Functions> functions,
                                                      double width) {
  const Plan& plan = task.model().plan();
  std::vector<BathFunctions> made;
  for (std::uint32_t b = 0; b < plan.chip.baths.size(); ++b) {
    auto bath = make_bath(plan, b, task.settings(), functions);
    if (!bath) return Unexpected{bath.error()};
    if (const auto zero = bath->zero_rate(); !zero) {
      return Unexpected{bath_error(plan, b, zero.error())};
    }
    const auto shared = std::make_shared<const ThermalBath>(std::move(bath).value());
    BathFunctions& both = made.emplace_back();
    both.rate = [shared](std::span<const double> w, double* out) {
      const auto n = static_cast<Eigen::Index>(w.size());
      Eigen::Map<Eigen::ArrayXd>(out, n) = shared->rate(Eigen::Map<const Eigen::ArrayXd>(w.data(), n));
    };
    if (!plan.choice.lamb_shift) continue;
    const auto table = std::make_shared<const ShiftTable>(ShiftFunction(*shared), width);
    both.shift = [table](std::span<const double> w, double* out) {
      const auto n = static_cast<Eigen::Index>(w.size());
      Eigen::Map<Eigen::ArrayXd>(out, n) = (*table)(Eigen::Map<const Eigen::ArrayXd>(w.data(), n));
    };
  }
  std::vector<BathFunctions> of_coupling;
  for (const Coupling& coupling : plan.chip.couplings) {
    of_coupling.push_back(made[coupling.bath]);
    of_coupling.back().alike = static_cast<int>(coupling.bath);
  }
  return of_coupling;
}

/// The jumps as written, at fixed coefficients.
Result<std::vector<LabJump>, RunError> jumps_of(const PointTask& task, const Functions& functions) {
  const Plan& plan = task.model().plan();
  const std::vector<double> here = functions.values(kCoefficients, task.timeline().first_s, 0);
  const std::vector<double> s = key_positions();
  const std::vector<double> along = plan.chip.jumps.empty() ? std::vector<double>{} : functions.along(kCoefficients, s);
  std::vector<LabJump> jumps;
  for (const Jump& jump : plan.chip.jumps) {
    for (const OperatorGroup& group : jump.op.groups) {
      for (std::size_t i = 0; i < s.size(); ++i) {
        if (along[group.coefficient * s.size() + i] == here[group.coefficient]) continue;
        return Unexpected{RunError{"jump_depends_on_s", fmt::format("jump {} changes along the anneal, which `davies` "
                                                                    "does not take; use `lindblad`", jump.what)}};
      }
    }
    jumps.push_back({dense_operator(scaled_words(jump.op, here), plan.chip.qubits.size()), 1.0});
  }
  return jumps;
}

Result<DaviesRun, RunError> run_of(const PointTask& task, std::shared_ptr<const Functions> functions) {
  const Plan& plan = task.model().plan();
  DaviesRun run;
  run.timeline = task.timeline();
  run.initial = density_of(task.begin());
  run.times.assign(task.times().begin(), task.times().end());
  auto jumps = jumps_of(task, *functions);
  if (!jumps) return Unexpected{jumps.error()};
  run.jumps = std::move(jumps).value();
  if (!plan.chip.drive.groups.empty()) {
    run.drive = [&plan, functions, timeline = task.timeline()](double t) {
      const std::vector<double> coefficients = functions->values(kCoefficients, s_at(timeline, t), t);
      return dense_operator(scaled_words(plan.chip.drive, coefficients), plan.chip.qubits.size());
    };
  }
  return run;
}

/// Nothing moves: the state is the first one at every instant.
void stand_still(PointTask& task) {
  task.begin_run();
  const State state = density_of(task.begin());
  for (std::size_t k = 0; k < task.times().size(); ++k) task.visit(k, state, 1);
  task.end_best_run({}, {}, true);
}

/// Answers, each finer than the last, until the task is content.
template <class Scalar>
void refine(PointTask& task, DaviesRefinement<Scalar> refinement) {
  while (task.wants_run()) {
    const auto answer = refinement.next();
    if (!answer) return task.fail(answer.error());
    for (const CoarserStates& coarser : answer->coarser) {
      task.begin_run();
      for (std::size_t k = 0; k < coarser.states.size(); ++k) task.visit(k, coarser.states[k], 1);
      task.end_coarser_run({coarser.weight, kOfDistance * coarser.weight});
    }
    task.begin_run();
    for (std::size_t k = 0; k < answer->states.size(); ++k) task.visit(k, answer->states[k], 1);
    task.note_leakage(answer->leakage);
    task.end_best_run(answer->counters, answer->floor, refinement.exhausted());
  }
}

std::shared_ptr<const Functions> functions_of(const PointTask& task) {
  auto functions = std::make_shared<Functions>(task.model().kernel(), task.model().tables(), task.model().plan());
  for (std::uint32_t i = 0; i < task.model().kernel().inputs(); ++i) functions->set_input(i, task.input(i));
  return functions;
}

}  // namespace

DaviesPoints::DaviesPoints(const PlanModel& model, std::size_t kept)
    : model_(model), memory_(std::make_shared<MemoryBudget>(kOfAvailable * memory_available().value_or(kUsualMemory))),
      tracks_(kept), tables_(kept) {}

std::vector<double> DaviesPoints::track_key(const Functions& functions) const {
  std::vector<double> key;
  for (const std::uint32_t slot : model_.plan().chip.level_inputs) key.push_back(functions.input(slot));
  return key;
}

/// True if every coefficient that tracking reads is finite at the places where it is looked at first.
bool DaviesPoints::finite_levels(const Functions& functions) const {
  const std::vector<double> s = key_positions();
  const std::vector<double> all = functions.along(kCoefficients, s);
  for (const std::uint32_t row : tracked_rows(model_.plan())) {
    const auto first = all.begin() + static_cast<std::ptrdiff_t>(row * s.size());
    if (!std::all_of(first, first + static_cast<std::ptrdiff_t>(s.size()), [](double x) { return std::isfinite(x); })) {
      return false;
    }
  }
  return true;
}

DaviesPoints::AnyTrack DaviesPoints::make_track(const PointTask& task, const Interrupted& interrupted) const {
  const HamiltonianFamily family = family_of(model_, functions_of(task), task.positions());
  TrackOptions options = track_options(task);
  options.interrupted = interrupted;
  options.memory = memory_;
  if (is_real(family)) return std::make_shared<const Track<double>>(dense_levels<double>(family), options);
  using Complex = std::complex<double>;
  return std::make_shared<const Track<Complex>>(dense_levels<Complex>(family), options);
}

Result<DaviesPoints::AnyTables, RunError> DaviesPoints::make_tables(const PointTask& task, const AnyTrack& any) const {
  const double width = std::visit([](const auto& track) { return track->width(); }, any);
  auto baths = baths_of(task, functions_of(task), std::max(1.05 * width, 1e-6));
  if (!baths) return Unexpected{baths.error()};
  return std::visit(
      [&]<class Scalar>(const TrackOf<Scalar>& track) -> AnyTables {
        return std::make_shared<const DaviesTables<Scalar>>(track, std::move(baths).value(), memory_);
      },
      any);
}

Result<DaviesPoints::AnyTables, RunError> DaviesPoints::tables_for(PointTask& task, const Interrupted& interrupted) {
  const Chip& chip = model_.plan().chip;
  const std::shared_ptr<const Functions> functions = functions_of(task);
  std::vector<double> key = track_key(*functions);
  if (!finite_levels(*functions)) {
    return Unexpected{RunError{"not_finite", "a coefficient of the Hamiltonian or of a noise operator is not finite"}};
  }
  const TrackOptions options = track_options(task);
  key.insert(key.end(), {options.s_min, options.s_max});
  const AnyTrack track = tracks_.get(key, [&] { return make_track(task, interrupted); });
  if (interrupted && interrupted()) return Unexpected{RunError{"interrupted", "stopped before the end", {}}};
  if (!std::visit([](const auto& typed) { return typed->resolved(); }, track)) {
    task.remark("levels change too fast somewhere along s to be followed; answers are marked by their errors at best");
  }
  const auto kept = std::visit([](const auto& typed) { return typed->levels(); }, track);
  if (options.levels > 0 && kept > options.levels) {
    task.remark(fmt::format("{} levels are kept instead of {}: a cut below would part levels that coincide", kept, options.levels));
  }
  for (std::uint32_t b = 0; b < chip.baths.size(); ++b) {
    const std::vector<double> more = bath_fingerprint(model_.plan(), b, task.settings(), *functions);
    key.insert(key.end(), more.begin(), more.end());
  }
  return tables_.get(key, [&] { return make_tables(task, track); });
}

void DaviesPoints::advance(PointTask& task, const Interrupted& interrupted) {
  if (!task.wants_run()) return;
  if (task.timeline().segments.empty()) return stand_still(task);
  const auto tables = tables_for(task, interrupted);
  if (!tables) return task.fail(tables.error());
  auto run = run_of(task, functions_of(task));
  if (!run) return task.fail(run.error());
  DaviesOptions options;
  options.interrupted = interrupted;
  std::visit([&]<class Scalar>(const TablesOf<Scalar>& typed) {
    refine(task, DaviesRefinement<Scalar>(*typed, *std::move(run), options));
  }, *tables);
}

}  // namespace tarn::runtime
