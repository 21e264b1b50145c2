#pragma once
/// \file The hierarchy and Redfield's equation with a driven memory for the points of one plan.

#include "runtime/experiment/chip_family.h"
#include "runtime/experiment/point.h"

namespace tarn::runtime {

/// True for the equations that this file runs.
bool runs_with_memory(const EquationChoice& choice);

/// Repeats until the task wants no run. Errors end up in the task: `bad_bath`, `bad_correlation`, `not_finite`,
/// `too_large`, and those of propagate_hierarchy() and propagate_driven_redfield().
void advance_with_memory(const PlanModel& model, PointTask& task, const Interrupted& interrupted);

}  // namespace tarn::runtime
