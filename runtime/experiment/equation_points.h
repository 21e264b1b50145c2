#pragma once
/// \file Which equation runs the points of a plan, and what its points share.

#include <optional>
#include <span>

#include "runtime/experiment/davies_points.h"
#include "runtime/experiment/open_points.h"

namespace tarn::runtime {

/// Safe to use from several threads.
class EquationPoints {
 public:
  /// `kept` >= 1 of what points share stay in memory.
  EquationPoints(const PlanModel& model, std::size_t kept);

  /// True if points of one chip should follow each other.
  bool shares_levels() const { return davies_ || open_; }

  /// Runs the tasks until none wants a run.
  void advance(std::span<PointTask* const> tasks, const Interrupted& interrupted);

  /// The generator standing still, where the equation has one; valid as long as this is.
  GeneratorAt generator(const Interrupted& interrupted);

 private:
  const PlanModel& model_;
  std::optional<DaviesPoints> davies_;
  std::optional<OpenPoints> open_;  ///< Also of Lindblad operators alone, for what stands still.
};

}  // namespace tarn::runtime
