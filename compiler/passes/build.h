#pragma once
/// \file Small helpers of the passes: look at values, append them, copy a module value by value.

#include <optional>
#include <vector>

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// The number of a constant, if the value is one.
std::optional<double> constant_of(const ir::Module& module, ir::ValueId id);

ir::ValueId constant(ir::Module& module, double value);
ir::ValueId unary(ir::Module& module, ir::UnaryOp op, ir::ValueId operand);
ir::ValueId binary(ir::Module& module, ir::BinaryOp op, ir::ValueId lhs, ir::ValueId rhs);
ir::ValueId select(ir::Module& module, ir::ValueId condition, ir::ValueId then_value, ir::ValueId else_value);

/// Type of the result of an operation.
ir::Type type_of(ir::BinaryOp op);

/// Everything of the module but its values, whose ids the functions still hold: remap() mends them.
ir::Module without_values(const ir::Module& module);

/// Replaces every function's and derivative's value id v by `to[v.row]`.
void remap(ir::Module& module, const std::vector<ir::ValueId>& to);

}  // namespace tarn::compiler
