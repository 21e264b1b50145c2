#include "runtime/experiment/memory_points.h"

#include <algorithm>
#include <cmath>

#include "runtime/bath/exponential_sum.h"
#include "runtime/equation/driven_redfield.h"
#include "runtime/equation/hierarchy_refinement.h"
#include "runtime/experiment/bath_of_plan.h"
#include "runtime/experiment/memory.h"
#include "runtime/experiment/noise_of_point.h"
#include "runtime/experiment/words.h"

namespace tarn::runtime {
namespace {

/// A hierarchy grows with the number of exponentials to the power of its depth: its sums are as good as an
/// answer to 1e-6 mostly needs, and the error says where that is not enough.
constexpr double kHierarchySum = 1e-3, kHierarchyCoarser = 1e-2;
/// Every exponential more is faster than the last, and steps follow the fastest.
constexpr double kDrivenSum = 1e-5, kDrivenCoarser = 1e-4;
constexpr double kBelow = 0.3;  ///< Deeper does not help once depth tells this little beside the sums.
constexpr double kOfStates = 0.03;  ///< Error of an answer over what the distance of the states could do to it.
constexpr double kOfMemory = 0.3, kMemoryIfUnknown = 4e9;

/// The sums of every noise operator's bath.
Result<std::vector<ExponentialSum>, RunError> sums_of(const Plan& plan, const NoiseOperators& noise,
                                                      const ThermalBaths& baths,
                                                      double tolerance, double duration, double w_max) {
  std::vector<ExponentialSum> of_bath;
  for (std::uint32_t b = 0; b < baths.size(); ++b) {
    auto sum = exponential_sum(*baths[b], tolerance, duration, w_max);
    if (!sum) return Unexpected{bath_error(plan, b, sum.error())};
    of_bath.push_back(std::move(sum).value());
  }
  std::vector<ExponentialSum> sums;
  for (const std::uint32_t b : noise.bath) sums.push_back(of_bath[b]);
  return sums;
}

bool constant_along_s(const OperatorSum& op, const Functions& functions) {
  const std::vector<double> s = sampled_positions(), along = functions.along(kCoefficients, s);
  return std::all_of(op.groups.begin(), op.groups.end(), [&](const OperatorGroup& group) {
    const auto first = along.begin() + static_cast<std::ptrdiff_t>(group.coefficient * s.size());
    return std::all_of(first, first + static_cast<std::ptrdiff_t>(s.size()), [&](double x) { return x == *first; });
  });
}

OpenSystem system_of(const PlanModel& model, std::shared_ptr<const Functions> functions, const NoiseOperators& noise) {
  const Chip& chip = model.plan().chip;
  const std::size_t qubits = chip.qubits.size();
  OpenSystem system;
  system.dimension = Eigen::Index{1} << qubits;
  system.reads_t = model.reads_t();
  const auto sum_at = [functions, qubits](const std::vector<OperatorGroup>& groups, double s, double t, Eigen::MatrixXcd& out) {
    const std::vector<double> coefficients = functions->values(kCoefficients, s, t);
    out = dense_operator(scaled_words({groups}, coefficients), qubits);
  };
  std::vector<OperatorGroup> hamiltonian = chip.hamiltonian.groups;
  hamiltonian.insert(hamiltonian.end(), chip.drive.groups.begin(), chip.drive.groups.end());
  system.hamiltonian = [=](double s, double t, Eigen::MatrixXcd& h) { sum_at(hamiltonian, s, t, h); };
  for (const OperatorSum& op : noise.ops) {
    system.couplings.push_back({[=, groups = op.groups](double s, Eigen::MatrixXcd& a) { sum_at(groups, s, 0, a); },
                                constant_along_s(op, *functions)});
  }
  return system;
}

/// The jumps as written, at fixed coefficients.
Result<std::vector<Eigen::MatrixXcd>, RunError> constant_jumps(const Plan& plan, const Functions& functions, double s) {
  std::vector<Eigen::MatrixXcd> jumps;
  for (const Jump& jump : plan.chip.jumps) {
    if (!constant_along_s(jump.op, functions)) {
      return Unexpected{RunError{"jump_depends_on_s", "jump " + jump.what + " changes along the anneal, which this equation does not take; use `lindblad`"}};
    }
    jumps.push_back(dense_operator(scaled_words(jump.op, functions.values(kCoefficients, s, 0)), plan.chip.qubits.size()));
  }
  return jumps;
}

void visit_all(PointTask& task, const std::vector<Density>& states) {
  task.begin_run();
  for (std::size_t k = 0; k < states.size(); ++k) task.visit(k, states[k], 1);
}

/// What a comparison tells of the error of an answer.
double told(const CoarserStates& coarser, const std::vector<Density>& states) {
  double most = 0;
  for (std::size_t k = 0; k < states.size(); ++k) most = std::max(most, coarser.weight * (coarser.states[k] - states[k]).norm());
  return most;
}

/// The first comparison is of the depth, the others are of the sums.
bool depth_is_enough(const HierarchyAnswer& answer) {
  double sums = 0;
  for (std::size_t c = 1; c < answer.coarser.size(); ++c) sums = std::max(sums, told(answer.coarser[c], answer.states));
  return !answer.coarser.empty() && told(answer.coarser.front(), answer.states) < kBelow * sums;
}

void refine(PointTask& task, HierarchyRefinement refinement) {
  while (task.wants_run()) {
    const auto answer = refinement.next();
    if (!answer) return task.fail(answer.error());
    for (const CoarserStates& coarser : answer->coarser) {
      visit_all(task, coarser.states);
      task.end_coarser_run({coarser.weight, kOfStates * coarser.weight});
    }
    visit_all(task, answer->states);
    const std::vector<double> floor(task.times().size(), answer->floor);
    task.end_best_run(answer->counters, floor, refinement.exhausted() || depth_is_enough(*answer));
  }
}

void run_hierarchy(const PlanModel& model, PointTask& task, OpenSystem system, std::vector<ExponentialSum> coarser, const Interrupted& interrupted) {
  HierarchyRun run;
  run.timeline = task.timeline();
  if (!task.begins_steady()) run.initial = density_of(task.begin());
  run.times.assign(task.times().begin(), task.times().end());
  run.breaks.assign(task.breaks().begin(), task.breaks().end());
  HierarchyOptions options;
  if (model.plan().choice.depth) options.depth = static_cast<int>(*model.plan().choice.depth);
  options.max_bytes = kOfMemory * memory_available().value_or(kMemoryIfUnknown);
  options.tolerance = std::min(1e-8, 0.01 * model.plan().tolerance);
  options.coarser_baths = std::move(coarser);
  options.interrupted = interrupted;
  refine(task, HierarchyRefinement(std::move(system), std::move(run), std::move(options)));
}

void run_driven(PointTask& task, const OpenSystem& system, const std::vector<ExponentialSum>& coarser, const Interrupted& interrupted) {
  OpenSystem second = system;
  second.baths = coarser;
  double ratio = 0;
  for (std::size_t c = 0; c < coarser.size(); ++c) {
    if (coarser[c].error > 0) ratio = std::max(ratio, std::min(1.0, system.baths[c].error / coarser[c].error));
  }
  const Density initial = density_of(task.begin());
  const StartingMemory memory = task.begins_steady() ? StartingMemory::settled : StartingMemory::none;
  const auto propagate = [&](const OpenSystem& of) {
    task.begin_run();
    const MemoryRun run{&task.timeline(), task.breaks(), task.times(), task.tolerance()};
    return propagate_driven_redfield(of, run, initial, memory, [&](std::size_t index, const State& state) { task.visit(index, state, 1); }, interrupted);
  };
  for (bool first = true; task.wants_run(); first = false) {
    if (!first) {
      const auto other = propagate(second);
      if (!other) return task.fail(other.error());
      task.end_coarser_run({ratio, kOfStates * ratio});
    }
    const auto counters = propagate(system);
    if (!counters) return task.fail(counters.error());
    task.end_run(*counters);
  }
}

}  // namespace

bool runs_with_memory(const EquationChoice& choice) {
  return choice.equation == Equation::hierarchy || (choice.equation == Equation::redfield && choice.memory == Memory::driven);
}

void advance_with_memory(const PlanModel& model, PointTask& task, const Interrupted& interrupted) {
  if (!task.wants_run()) return;
  const Plan& plan = model.plan();
  const bool hierarchy = plan.choice.equation == Equation::hierarchy;
  const std::shared_ptr<const Functions> functions = functions_of(task);
  if (!finite_levels(plan, *functions)) {
    return task.fail({"not_finite", "a coefficient of the Hamiltonian or of a noise operator is not finite"});
  }
  const auto noise = independent_noise(plan, task.settings());
  if (!noise) return task.fail(noise.error());
  const auto baths = fast_baths(plan, task.settings(), functions);
  if (!baths) return task.fail(baths.error());
  const double duration = std::max(task.timeline().duration(), 1.0);
  const double w_max = frequency_bound(model, *functions, followed_range(task.timeline()));
  auto sums = sums_of(plan, *noise, *baths, hierarchy ? kHierarchySum : kDrivenSum, duration, w_max);
  if (!sums) return task.fail(sums.error());
  auto coarser = sums_of(plan, *noise, *baths, hierarchy ? kHierarchyCoarser : kDrivenCoarser, duration, w_max);
  if (!coarser) return task.fail(coarser.error());
  OpenSystem system = system_of(model, functions, *noise);
  system.baths = std::move(sums).value();
  auto jumps = constant_jumps(plan, *functions, task.timeline().first_s);
  if (!jumps) return task.fail(jumps.error());
  system.jumps = std::move(jumps).value();
  if (hierarchy) run_hierarchy(model, task, std::move(system), std::move(coarser).value(), interrupted);
  else run_driven(task, system, *coarser, interrupted);
}

}  // namespace tarn::runtime
