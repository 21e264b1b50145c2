#include "runtime/experiment/davies_points.h"

#include <fmt/format.h>

#include <algorithm>
#include <bit>
#include <cmath>
#include <set>

#include "lang/support/check.h"
#include "runtime/bath/shift.h"
#include "runtime/equation/davies_modes.h"
#include "runtime/equation/davies_refinement.h"
#include "runtime/experiment/bath_of_plan.h"
#include "runtime/experiment/memory.h"
#include "runtime/experiment/noise_of_point.h"
#include "runtime/experiment/words.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

constexpr double kOfAvailable = 0.3;   ///< Of the memory there is: what tracks and tables may keep.
constexpr double kUsualMemory = 4e9;   ///< Where the system does not tell.
constexpr double kOfDistance = 0.03;  ///< Error of an answer over what the distance of the states could do to it.

TrackOptions track_options(const PointTask& task) {
  TrackOptions options;
  const RangeOfS range = followed_range(task.timeline());
  options.s_min = range.lowest;
  options.s_max = range.highest;
  if (task.model().plan().levels) {
    options.levels = static_cast<Eigen::Index>(*task.model().plan().levels);
    // Where the cut between kept and left out levels is crossed, nodes gain nothing.
    options.max_intervals = 2000;
  }
  return options;
}

/// gamma and S of every noise operator's bath, good for frequencies up to `width`.
std::vector<BathFunctions> functions_of_baths(const Plan& plan, const NoiseOperators& noise,
                                              std::span<const std::shared_ptr<const ThermalBath>> baths, double width) {
  std::vector<BathFunctions> made;
  for (const std::shared_ptr<const ThermalBath>& bath : baths) {
    BathFunctions& both = made.emplace_back();
    both.rate = [bath](std::span<const double> w, double* out) {
      const auto n = static_cast<Eigen::Index>(w.size());
      Eigen::Map<Eigen::ArrayXd>(out, n) = bath->rate(Eigen::Map<const Eigen::ArrayXd>(w.data(), n));
    };
    if (!plan.choice.lamb_shift) continue;
    const auto table = std::make_shared<const ShiftTable>(ShiftFunction(*bath), width);
    both.shift = [table](std::span<const double> w, double* out) {
      const auto n = static_cast<Eigen::Index>(w.size());
      Eigen::Map<Eigen::ArrayXd>(out, n) = (*table)(Eigen::Map<const Eigen::ArrayXd>(w.data(), n));
    };
  }
  std::vector<BathFunctions> of_operator;
  for (const std::uint32_t bath : noise.bath) {
    of_operator.push_back(made[bath]);
    of_operator.back().alike = static_cast<int>(bath);
  }
  return of_operator;
}

/// The jumps as written, at fixed coefficients.
Result<std::vector<LabJump>, RunError> jumps_of(const PointTask& task, const Functions& functions) {
  const Plan& plan = task.model().plan();
  const std::vector<double> here = functions.values(kCoefficients, task.timeline().first_s, 0);
  const std::vector<double> s = sampled_positions();
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

}  // namespace

DaviesPoints::DaviesPoints(const PlanModel& model, std::size_t kept)
    : model_(model), memory_(std::make_shared<MemoryBudget>(kOfAvailable * memory_available().value_or(kUsualMemory))),
      tracks_(kept), tables_(kept) {}

Result<DaviesPoints::AnyTables, RunError> DaviesPoints::tables_for(PointTask& task, const Interrupted& interrupted) {
  const Plan& plan = model_.plan();
  const std::shared_ptr<const Functions> functions = functions_of(task);
  if (!finite_levels(plan, *functions)) {
    return Unexpected{RunError{"not_finite", "a coefficient of the Hamiltonian or of a noise operator is not finite"}};
  }
  const auto noise = independent_noise(plan, task.settings());
  if (!noise) return Unexpected{noise.error()};
  const auto baths = fast_baths(plan, task.settings(), functions);
  if (!baths) return Unexpected{baths.error()};
  TrackOptions options = track_options(task);
  options.interrupted = interrupted;
  options.memory = memory_;
  std::vector<double> key = levels_key(plan, *functions, task.settings());
  key.insert(key.end(), {options.s_min, options.s_max});
  const AnyTrack track = tracks_.get(key, [&]() -> AnyTrack {
    const HamiltonianFamily family = family_of(model_, functions, *noise, task.positions());
    if (is_real(family)) return std::make_shared<const Track<double>>(dense_levels<double>(family), options);
    return std::make_shared<const Track<Complex>>(dense_levels<Complex>(family), options);
  });
  if (interrupted && interrupted()) return Unexpected{RunError{"interrupted", "stopped before the end", {}}};
  if (!std::visit([](const auto& typed) { return typed->resolved(); }, track)) {
    task.remark("levels change too fast somewhere along s to be followed; answers are marked by their errors at best");
  }
  const auto kept = std::visit([](const auto& typed) { return typed->levels(); }, track);
  if (options.levels > 0 && kept > options.levels) {
    task.remark(fmt::format("{} levels are kept instead of {}: a cut below would part levels that coincide", kept, options.levels));
  }
  for (std::uint32_t b = 0; b < plan.chip.baths.size(); ++b) {
    const std::vector<double> more = bath_fingerprint(plan, b, task.settings(), *functions);
    key.insert(key.end(), more.begin(), more.end());
  }
  return tables_.get(key, [&]() -> AnyTables {
    return std::visit([&]<class Scalar>(const TrackOf<Scalar>& typed) -> AnyTables {
      const double width = std::max(1.05 * typed->width(), 1e-6);
      return std::make_shared<const DaviesTables<Scalar>>(typed, functions_of_baths(plan, *noise, *baths, width), memory_);
    }, track);
  });
}

/// The generator at one s, and the levels that it is written in.
struct DaviesPoints::Standing {
  DaviesTable table;
  Eigen::VectorXd energies;
  Eigen::MatrixXcd vectors;
};

Result<DaviesPoints::Standing, RunError> DaviesPoints::standing(PointTask& task, double s, const Interrupted& interrupted) {
  const auto tables = tables_for(task, interrupted);
  if (!tables) return Unexpected{tables.error()};
  return std::visit([&]<class Scalar>(const TablesOf<Scalar>& typed) -> Standing {
    const Track<Scalar>& track = typed->track();
    const Frame<Scalar> frame = track.at(s);
    return {davies_table<Scalar>(track.model(), frame, frequency_groups(frame.energies, track.tolerance()), typed->baths()),
            frame.energies, frame.vectors.template cast<Complex>()};
  }, *tables);
}

Result<Mode, RunError> DaviesPoints::mode(PointTask& task, double s, std::optional<LevelPair> pair, const Interrupted& interrupted) {
  const auto here = standing(task, s, interrupted);
  if (!here) return Unexpected{here.error()};
  const Eigen::Index levels = here->energies.size();
  if (levels < 2 || (pair && std::max(pair->row, pair->column) >= levels)) return Unexpected{RunError{"no_such_level", "the chip has fewer levels"}};
  const auto mode = pair ? coherence_mode(here->table, here->energies, pair->row, pair->column) : population_mode(here->table, here->energies);
  if (!mode) return Unexpected{no_modes()};
  return *mode;
}

Result<Density, RunError> DaviesPoints::steady(PointTask& task, double s, const Interrupted& interrupted) {
  const auto here = standing(task, s, interrupted);
  if (!here) return Unexpected{here.error()};
  const auto state = stationary_state(here->table, here->energies);
  if (!state) return Unexpected{no_steady_state()};
  return Density(here->vectors * *state * here->vectors.adjoint());
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
