#pragma once
/// \file Where schedules have kinks: conditions on s that the runtime solves at each grid point.

#include <vector>

#include "lang/program/graph.h"

namespace tarn::compiler {

/// `node` equal to one of `levels` is a kink of some coefficient.
struct KinkCondition {
  NodeId node;
  std::vector<double> levels;
};

/// Kinks of the given nodes in s: abs, min, max and select over comparisons, and the points of
/// tables that are not twice differentiable (linear, log-log and monotone ones; a spline's ends).
/// Conditions that depend on t are no places in s and are left to step control.
std::vector<KinkCondition> find_kinks(Graph& graph, const std::vector<NodeId>& roots);

}  // namespace tarn::compiler
