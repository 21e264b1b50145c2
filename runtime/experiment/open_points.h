#pragma once
/// \file Redfield's, the coarse-grained and the universal equation for the points of one plan: tables
/// along s that points share.

#include <memory>
#include <vector>

#include "runtime/experiment/chip_family.h"
#include "runtime/experiment/generator_at.h"
#include "runtime/experiment/keyed_cache.h"
#include "runtime/experiment/point.h"

namespace tarn::runtime {

/// True for the equations that this file runs.
bool runs_on_noise_table(const EquationChoice& choice);

/// Safe to use from several threads; a point's bits do not depend on which thread made a table, or when.
class OpenPoints {
 public:
  /// `kept` >= 1 tables stay in memory.
  OpenPoints(const PlanModel& model, std::size_t kept) : model_(model), tables_(kept) {}

  /// Repeats until the task wants no run. Errors end up in the task: `bad_bath`, `bad_correlation`,
  /// `not_finite`, `window_out_of_range`, and those of propagate_open().
  void advance(PointTask& task, const Interrupted& interrupted);

  /// As GeneratorAt has them (generator_at.h).
  Result<Mode, RunError> mode(PointTask& task, double s, std::optional<LevelPair> pair, const Interrupted& interrupted);
  Result<Density, RunError> steady(PointTask& task, double s, const Interrupted& interrupted);

 private:
  using Table = std::shared_ptr<const NoiseTable>;
  Result<Table, RunError> table_for(PointTask& task, bool standing, const Interrupted& interrupted);
  /// The generator where the pace stands at s, as a map on vec(rho).
  Result<Eigen::MatrixXcd, RunError> map_at(PointTask& task, double s, const Interrupted& interrupted);

  const PlanModel& model_;
  KeyedCache<Result<Table, RunError>> tables_;
};

}  // namespace tarn::runtime
