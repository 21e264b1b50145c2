#pragma once
/// \file Many grid points on several threads.

#include <cstdint>
#include <functional>
#include <span>
#include <vector>

#include "runtime/experiment/outcome.h"
#include "runtime/experiment/plan_model.h"

namespace tarn::runtime {

/// One point and the plan it belongs to.
struct PointItem {
  std::uint64_t index = 0;
  std::uint64_t row = 0;  ///< As row_of() has it.
  const PlanModel* model = nullptr;
};

struct PointsOptions {
  std::size_t jobs = 1;
  Interrupted interrupted;  ///< May be empty.
  /// Called after each group of points with how many are done, and now and then while a scan goes on; `under_way`
  /// adds up the shares of the scans that are not done. From one thread at a time; may be empty.
  std::function<void(std::size_t done, double under_way)> progress;
};

/// Runs the points, which are in grid order. Points of one plan that fit the lanes of its kernel go
/// together; every bit of a point is the same whichever they are, and for any number of jobs.
/// When interrupted, unfinished points are missing from the answer, which is in grid order.
std::vector<PointOutcome> run_points(std::span<const PointItem> items, const PointsOptions& options);

}  // namespace tarn::runtime
