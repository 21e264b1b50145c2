#include "compiler/passes/fold.h"

#include <cmath>

#include "compiler/passes/build.h"
#include "compiler/passes/evaluate.h"

namespace tarn::compiler {

using namespace ir;

namespace {

bool is_power_of_two(double x) {
  int exponent = 0;
  return x != 0 && std::isfinite(1 / x) && std::fabs(std::frexp(x, &exponent)) == 0.5;
}

class Folder {
 public:
  explicit Folder(const Module& module) : from_(module), to_(without_values(module)) {}

  Module run() {
    map_.reserve(from_.values.size());
    for (const Value& value : from_.values) {
      Op op = value.op;
      for_each_operand(op, [&](ValueId& operand) { operand = map_[operand.row]; });
      map_.push_back(std::visit([&](const auto& one) { return folded(one, value.type); }, op));
    }
    remap(to_, map_);
    return std::move(to_);
  }

 private:
  std::optional<double> number(ValueId id) const { return constant_of(to_, id); }
  bool is(ValueId id, double value) const { return number(id) == value; }

  template <class Operation>
  const Operation* as(ValueId id) const {
    return std::get_if<Operation>(&to_.values[id.row].op);
  }

  /// The operand of `id` if that is the given unary operation.
  std::optional<ValueId> inside(UnaryOp op, ValueId id) const {
    const auto* unary = as<Unary>(id);
    if (unary && unary->op == op) return unary->operand;
    return std::nullopt;
  }

  template <class Operation>
  ValueId folded(const Operation& op, Type type) {
    return append(to_, op, type);
  }

  ValueId folded(const Unary& op, Type type) {
    if (const auto x = number(op.operand)) {
      const double result = evaluate(op.op, *x);
      if (std::isfinite(result)) return append(to_, Constant{result}, type);
    }
    if (op.op == UnaryOp::neg || op.op == UnaryOp::logical_not)
      if (const auto twice = inside(op.op, op.operand)) return *twice;
    if (op.op == UnaryOp::abs)
      if (const auto negated = inside(UnaryOp::neg, op.operand)) return unary(to_, UnaryOp::abs, *negated);
    return append(to_, op, type);
  }

  ValueId folded(const Binary& op, Type type) {
    const auto x = number(op.lhs), y = number(op.rhs);
    if (x && y) {
      const double result = evaluate(op.op, *x, *y);
      if (std::isfinite(result)) return append(to_, Constant{result}, type);
    }
    if (const auto simpler = type == Type::real ? arithmetic(op) : logic(op)) return *simpler;
    return append(to_, op, type);
  }

  ValueId folded(const Select& op, Type type) {
    if (const auto condition = number(op.condition)) return *condition != 0 ? op.then_value : op.else_value;
    if (op.then_value == op.else_value) return op.then_value;
    return append(to_, op, type);
  }

  std::optional<ValueId> arithmetic(const Binary& op) {
    const auto [kind, x, y] = op;
    switch (kind) {
      case BinaryOp::add: return sum(x, y);
      case BinaryOp::sub:
        if (is(y, 0)) return x;
        if (is(x, 0)) return unary(to_, UnaryOp::neg, y);
        if (const auto negated = inside(UnaryOp::neg, y)) return binary(to_, BinaryOp::add, x, *negated);
        return std::nullopt;
      case BinaryOp::mul: return product(x, y);
      case BinaryOp::div:
        if (is(y, 1)) return x;
        if (const auto divisor = number(y); divisor && is_power_of_two(*divisor))
          return binary(to_, BinaryOp::mul, x, constant(to_, 1 / *divisor));
        return std::nullopt;
      case BinaryOp::pow:
        if (is(y, 0)) return constant(to_, 1);
        if (is(y, 1)) return x;
        if (is(y, 2)) return binary(to_, BinaryOp::mul, x, x);
        if (is(y, -1)) return binary(to_, BinaryOp::div, constant(to_, 1), x);
        return std::nullopt;
      case BinaryOp::min:
      case BinaryOp::max: return x == y ? std::optional(x) : std::nullopt;
      case BinaryOp::mod:
      case BinaryOp::less:
      case BinaryOp::less_equal:
      case BinaryOp::equal:
      case BinaryOp::not_equal:
      case BinaryOp::logical_and:
      case BinaryOp::logical_or: return std::nullopt;
    }
    return std::nullopt;
  }

  std::optional<ValueId> sum(ValueId x, ValueId y) {
    if (is(x, 0)) return y;
    if (is(y, 0)) return x;
    if (const auto negated = inside(UnaryOp::neg, y)) return binary(to_, BinaryOp::sub, x, *negated);
    if (const auto negated = inside(UnaryOp::neg, x)) return binary(to_, BinaryOp::sub, y, *negated);
    return std::nullopt;
  }

  std::optional<ValueId> product(ValueId x, ValueId y) {
    if (is(x, 1)) return y;
    if (is(y, 1)) return x;
    if (is(x, -1)) return unary(to_, UnaryOp::neg, y);
    if (is(y, -1)) return unary(to_, UnaryOp::neg, x);
    return std::nullopt;
  }

  std::optional<ValueId> logic(const Binary& op) {
    const auto [kind, x, y] = op;
    if (kind != BinaryOp::logical_and && kind != BinaryOp::logical_or) return std::nullopt;
    const double neutral = kind == BinaryOp::logical_and ? 1 : 0;
    if (is(x, neutral) || x == y) return y;
    if (is(y, neutral)) return x;
    if (number(x)) return x;
    if (number(y)) return y;
    return std::nullopt;
  }

  const Module& from_;
  Module to_;
  std::vector<ValueId> map_;
};

}  // namespace

Module fold(const Module& module) { return Folder(module).run(); }

}  // namespace tarn::compiler
