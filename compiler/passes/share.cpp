#include "compiler/passes/share.h"

#include <bit>
#include <functional>
#include <unordered_map>
#include <utility>

#include "compiler/passes/build.h"

namespace tarn::compiler {

using namespace ir;

namespace {

std::size_t mix(std::size_t seed, std::uint64_t value) {
  return (seed ^ (value + 0x9e3779b97f4a7c15u + (seed << 6) + (seed >> 2))) * 0xff51afd7ed558ccdu;
}

struct Hash {
  std::size_t operator()(const Value& value) const {
    std::size_t seed = mix(value.op.index(), static_cast<std::uint64_t>(value.type));
    for_each_operand(value.op, [&](const ValueId& operand) { seed = mix(seed, operand.row); });
    return mix(seed, std::visit([](const auto& op) { return detail(op); }, value.op));
  }
  static std::uint64_t detail(const Constant& op) { return std::bit_cast<std::uint64_t>(op.value); }
  static std::uint64_t detail(const Input& op) { return op.slot; }
  static std::uint64_t detail(const ReadArgument& op) { return static_cast<std::uint64_t>(op.argument); }
  static std::uint64_t detail(const Unary& op) { return static_cast<std::uint64_t>(op.op); }
  static std::uint64_t detail(const Binary& op) { return static_cast<std::uint64_t>(op.op); }
  static std::uint64_t detail(const Select&) { return 0; }
  static std::uint64_t detail(const TableRead& op) { return op.table.row * 8u + op.order; }
};

/// Equal to the bit: 0 and -0 are two constants.
struct Same {
  bool operator()(const Value& a, const Value& b) const {
    const auto *x = std::get_if<Constant>(&a.op), *y = std::get_if<Constant>(&b.op);
    if (x && y) return a.type == b.type && std::bit_cast<std::uint64_t>(x->value) == std::bit_cast<std::uint64_t>(y->value);
    return a == b;
  }
};

bool is_commutative(BinaryOp op) {
  return op == BinaryOp::add || op == BinaryOp::mul || op == BinaryOp::equal || op == BinaryOp::not_equal ||
         op == BinaryOp::logical_and || op == BinaryOp::logical_or;
}

std::vector<bool> find_used(const Module& module) {
  std::vector<bool> used(module.values.size(), false);
  for (const FunctionSet& set : module.sets) {
    for (const Function& function : set.functions) used[function.value.row] = true;
    for (const ValueId derivative : set.derivatives) used[derivative.row] = true;
  }
  for (std::size_t row = module.values.size(); row-- > 0;)
    if (used[row]) for_each_operand(module.values[row].op, [&](const ValueId& operand) { used[operand.row] = true; });
  return used;
}

}  // namespace

Module share(const Module& module) {
  const std::vector<bool> used = find_used(module);
  Module result = without_values(module);
  std::vector<ValueId> map(module.values.size());
  std::unordered_map<Value, ValueId, Hash, Same> known;
  for (std::size_t row = 0; row < module.values.size(); ++row) {
    if (!used[row]) continue;
    Value value = module.values[row];
    for_each_operand(value.op, [&](ValueId& operand) { operand = map[operand.row]; });
    if (auto* op = std::get_if<Binary>(&value.op); op && is_commutative(op->op) && op->rhs < op->lhs)
      std::swap(op->lhs, op->rhs);
    const auto [place, is_new] = known.try_emplace(value, ValueId{});
    if (is_new) place->second = append(result, value.op, value.type);
    map[row] = place->second;
  }
  remap(result, map);
  return result;
}

}  // namespace tarn::compiler
