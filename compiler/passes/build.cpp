#include "compiler/passes/build.h"

namespace tarn::compiler {

using namespace ir;

std::optional<double> constant_of(const Module& module, ValueId id) {
  if (const auto* constant = std::get_if<Constant>(&module.values[id.row].op)) return constant->value;
  return std::nullopt;
}

ValueId constant(Module& module, double value) { return append(module, Constant{value}); }

ValueId unary(Module& module, UnaryOp op, ValueId operand) {
  return append(module, Unary{op, operand}, op == UnaryOp::logical_not ? Type::truth : Type::real);
}

ValueId binary(Module& module, BinaryOp op, ValueId lhs, ValueId rhs) {
  return append(module, Binary{op, lhs, rhs}, type_of(op));
}

ValueId select(Module& module, ValueId condition, ValueId then_value, ValueId else_value) {
  return append(module, Select{condition, then_value, else_value}, module.values[then_value.row].type);
}

Type type_of(BinaryOp op) { return op >= BinaryOp::less ? Type::truth : Type::real; }

Module without_values(const Module& module) {
  Module rest;
  rest.name = module.name;
  rest.inputs = module.inputs;
  rest.tables = module.tables;
  rest.sets = module.sets;
  rest.generators = module.generators;
  return rest;
}

void remap(Module& module, const std::vector<ValueId>& to) {
  for (FunctionSet& set : module.sets) {
    for (Function& function : set.functions) function.value = to[function.value.row];
    for (ValueId& derivative : set.derivatives) derivative = to[derivative.row];
  }
}

}  // namespace tarn::compiler
