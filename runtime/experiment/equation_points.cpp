#include "runtime/experiment/equation_points.h"

#include "runtime/experiment/advance.h"
#include "runtime/experiment/memory_points.h"

namespace tarn::runtime {

EquationPoints::EquationPoints(const PlanModel& model, std::size_t kept) : model_(model) {
  const EquationChoice& choice = model.plan().choice;
  if (choice.equation == Equation::davies) davies_.emplace(model, kept);
  const bool standing = choice.equation == Equation::redfield || choice.equation == Equation::lindblad;
  if (runs_on_noise_table(choice) || standing) open_.emplace(model, kept);
}

void EquationPoints::advance(std::span<PointTask* const> tasks, const Interrupted& interrupted) {
  const EquationChoice& choice = model_.plan().choice;
  const bool own = davies_ || runs_on_noise_table(choice) || runs_with_memory(choice);
  if (!own) return runtime::advance(model_, tasks, interrupted);
  for (PointTask* task : tasks) {
    if (davies_) davies_->advance(*task, interrupted);
    else if (runs_on_noise_table(choice)) open_->advance(*task, interrupted);
    else advance_with_memory(model_, *task, interrupted);
  }
}

GeneratorAt EquationPoints::generator(const Interrupted& interrupted) {
  GeneratorAt at;
  const auto offer = [&](auto& points) {
    at.mode = [&points, interrupted](PointTask& task, double s, std::optional<LevelPair> pair) { return points.mode(task, s, pair, interrupted); };
    at.steady = [&points, interrupted](PointTask& task, double s) { return points.steady(task, s, interrupted); };
  };
  if (davies_) offer(*davies_);
  else if (open_) offer(*open_);
  return at;
}

}  // namespace tarn::runtime
