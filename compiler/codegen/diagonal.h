#pragma once
/// \file Compiled diagonals: sign vectors made once by `prepare`, or summed anew for each sweep.

#include "compiler/codegen/sweep_plan.h"
#include "compiler/codegen/unit.h"

namespace tarn::compiler {

/// A tarn_prepare_fn: one fast Walsh transform a sign vector.
llvm::Function* emit_prepare(Unit& unit, const SweepPlan& plan, const std::string& name);

/// An internal function of (coefficients, d) that fills d with the 2^bits numbers of the plan's
/// summed diagonal: some n 2^n additions however many coefficients there are.
/// Precondition: the plan has one, and at least 6 bits.
llvm::Function* emit_summed_diagonal(Unit& unit, const SweepPlan& plan, const std::string& name);

}  // namespace tarn::compiler
