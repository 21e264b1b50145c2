#pragma once
/// \file One operation on plain numbers: what folding computes, with the C library's functions.

#include "compiler/ir/module.h"

namespace tarn::compiler {

double evaluate(ir::UnaryOp op, double x);

/// Truths are 0 and 1. mod has the sign of the divisor; min and max give NaN if either operand is.
double evaluate(ir::BinaryOp op, double x, double y);

}  // namespace tarn::compiler
