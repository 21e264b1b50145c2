#pragma once
/// \file Compiled generators on lane vectors: one register holds the same entry for W points.

#include "compiler/codegen/sweep_plan.h"
#include "compiler/codegen/unit.h"

namespace tarn::compiler {

/// A tarn_apply_fn on lane vectors with coefficients per lane. Small generators become straight-line
/// code, one multiplication for each nonzero part of an element; larger ones a loop over a table
/// of elements, so that the code does not outgrow the instruction cache.
llvm::Function* emit_lane_apply(Unit& unit, const SweepPlan& plan, const std::string& name);

}  // namespace tarn::compiler
