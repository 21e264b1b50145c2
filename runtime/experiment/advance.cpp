#include "runtime/experiment/advance.h"

#include <algorithm>
#include <vector>

#include "lang/support/check.h"
#include "runtime/equation/lindblad.h"
#include "runtime/equation/schroedinger.h"

namespace tarn::runtime {
namespace {

/// One initial state of one task.
struct Job {
  PointTask* task = nullptr;
  std::size_t ket = 0;  ///< Of its mixture; 0 for a density matrix.
};

LinearRun linear_run_of(const PointTask& task) { return {&task.timeline(), task.breaks(), task.times(), task.tolerance()}; }

/// The inputs of up to W tasks, a lane each; idle lanes repeat the first.
InputBlock lane_inputs(const PlanModel& model, std::span<const Job> jobs) {
  InputBlock block(model.kernel(), model.tables());
  for (std::uint32_t lane = 0; lane < model.kernel().lanes(); ++lane) {
    const PointTask& task = *jobs[lane < jobs.size() ? lane : 0].task;
    for (std::uint32_t i = 0; i < model.kernel().inputs(); ++i) block.set(i, lane, task.input(i));
  }
  return block;
}

using Outcomes = std::vector<Result<Counters, RunError>>;

std::vector<Visit> visits_of(std::span<const Job> jobs, bool density) {
  std::vector<Visit> visits;
  for (const Job& job : jobs) {
    const double weight = density ? 1.0 : job.task->begin().weights[job.ket];
    visits.push_back([task = job.task, weight](std::size_t index, const State& state) {
      task->visit(index, state, weight);
    });
  }
  return visits;
}

/// Jobs that fit the lanes, in one go.
Outcomes propagate(const PlanModel& model, std::span<const Job> jobs, const Interrupted& interrupted) {
  const bool density = model.plan().choice.equation == Equation::lindblad;
  const std::vector<Visit> visits = visits_of(jobs, density);
  std::vector<LinearRun> runs;
  for (const Job& job : jobs) runs.push_back(linear_run_of(*job.task));
  const InputBlock inputs = lane_inputs(model, jobs);
  const Entries entries = model.entries();
  if (density) {
    std::vector<Density> initial;
    for (const Job& job : jobs) initial.push_back(density_of(job.task->begin()));
    if (entries.lanes > 1) return propagate_lindblad_lanes(entries, *inputs.block(), runs, initial, visits, interrupted);
    return {propagate_lindblad(entries, *inputs.block(), runs[0], initial[0], visits[0], interrupted)};
  }
  std::vector<Ket> initial;
  for (const Job& job : jobs) initial.push_back(job.task->begin().kets[job.ket]);
  if (entries.lanes > 1) return propagate_schroedinger_lanes(entries, *inputs.block(), runs, initial, visits, interrupted);
  return {propagate_schroedinger(entries, *inputs.block(), runs[0], initial[0], visits[0], interrupted)};
}

/// Nothing moves: the state at every instant is the first.
void stay(PointTask& task, bool density) {
  const Mixture& begin = task.begin();
  for (std::size_t index = 0; index < task.times().size(); ++index) {
    if (density) task.visit(index, density_of(begin), 1);
    for (std::size_t k = 0; k < begin.kets.size() && !density; ++k) task.visit(index, begin.kets[k], begin.weights[k]);
  }
}

std::vector<Job> jobs_of(std::span<PointTask* const> tasks, bool density) {
  std::vector<Job> jobs;
  for (PointTask* task : tasks) {
    if (task->timeline().segments.empty()) {
      stay(*task, density);
      continue;
    }
    const std::size_t count = density ? 1 : task->begin().kets.size();
    for (std::size_t k = 0; k < count; ++k) jobs.push_back({task, k});
  }
  return jobs;
}

/// One run of every task.
void run_once(const PlanModel& model, std::span<PointTask* const> tasks, const Interrupted& interrupted) {
  const bool density = model.plan().choice.equation == Equation::lindblad;
  for (PointTask* task : tasks) task->begin_run();
  const std::vector<Job> jobs = jobs_of(tasks, density);
  std::vector<Counters> counters(tasks.size());
  for (std::size_t first = 0; first < jobs.size(); first += model.lanes()) {
    const auto chunk = std::span(jobs).subspan(first, std::min(model.lanes(), jobs.size() - first));
    const Outcomes outcomes = propagate(model, chunk, interrupted);
    for (std::size_t j = 0; j < chunk.size(); ++j) {
      const auto position = std::find(tasks.begin(), tasks.end(), chunk[j].task) - tasks.begin();
      if (outcomes[j]) counters[static_cast<std::size_t>(position)] += *outcomes[j];
      else chunk[j].task->fail(outcomes[j].error());
    }
  }
  for (std::size_t i = 0; i < tasks.size(); ++i) tasks[i]->end_run(counters[i]);
}

}  // namespace

void advance(const PlanModel& model, std::span<PointTask* const> tasks, const Interrupted& interrupted) {
  for (;;) {
    std::vector<PointTask*> open;
    for (PointTask* task : tasks) {
      if (task->wants_run()) open.push_back(task);
    }
    if (open.empty()) return;
    run_once(model, open, interrupted);
  }
}

}  // namespace tarn::runtime
