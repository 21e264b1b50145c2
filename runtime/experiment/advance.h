#pragma once
/// \file Runs the propagations that points ask for, by the equation of their plan.

#include <span>

#include "runtime/experiment/point.h"

namespace tarn::runtime {

/// Repeats until no task wants a run. Tasks belong to one plan with equation `schroedinger` or
/// `lindblad`; as many run together as the kernel has lanes. A task's bits do not depend on the
/// others. A mixture is propagated ket by ket, or as a density matrix for `lindblad`.
void advance(const PlanModel& model, std::span<PointTask* const> tasks, const Interrupted& interrupted);

}  // namespace tarn::runtime
