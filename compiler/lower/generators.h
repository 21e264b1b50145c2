#pragma once
/// \file Generators of motion from the operators of a chip.

#include "compiler/ir/module.h"
#include "compiler/lower/rows.h"
#include "runtime/plan/plan.h"

namespace tarn::compiler {

/// Appends H, -i H and, if asked, the Liouvillian
///   d rho/dt = -i [H, rho] + sum_j (L_j rho L_j^+ - {L_j^+ L_j, rho}/2)
/// on 2n bits (Commun. Math. Phys. 48, 119 (1976)). H includes the terms in t. Products of
/// coefficients become rows of set kCoefficients.
void append_generators(const runtime::Chip& chip, bool liouvillian, Rows& coefficients, ir::Module& module);

}  // namespace tarn::compiler
