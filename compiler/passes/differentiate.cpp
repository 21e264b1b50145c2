#include "compiler/passes/differentiate.h"

#include <cmath>
#include <optional>

#include "compiler/passes/build.h"

namespace tarn::compiler {

using namespace ir;

namespace {

/// No value: the derivative is 0 whatever the argument.
using Slope = std::optional<ValueId>;

class Differentiator {
 public:
  explicit Differentiator(const Module& module) : module_(module) {}

  Module run() {
    bool wanted = false;
    for (const FunctionSet& set : module_.sets) wanted = wanted || set.differentiate;
    if (!wanted) return std::move(module_);
    const std::size_t count = module_.values.size();
    for (std::size_t row = 0; row < count; ++row) {
      const Value value = module_.values[row];
      self_ = {static_cast<std::uint32_t>(row)};
      slopes_.push_back(value.type == Type::real ? std::visit([&](const auto& op) { return slope(op); }, value.op) : Slope{});
    }
    for (FunctionSet& set : module_.sets)
      if (set.differentiate) fill(set);
    return std::move(module_);
  }

 private:
  void fill(FunctionSet& set) {
    set.derivatives.clear();
    for (const Function& function : set.functions) set.derivatives.push_back(plain(slopes_[function.value.row]));
  }

  ValueId number(double value) { return constant(module_, value); }
  ValueId plain(Slope slope) { return slope ? *slope : number(0); }
  ValueId op(BinaryOp op, ValueId x, ValueId y) { return binary(module_, op, x, y); }
  ValueId op(UnaryOp op, ValueId x) { return unary(module_, op, x); }
  ValueId times(ValueId x, ValueId y) { return op(BinaryOp::mul, x, y); }

  Slope add(Slope x, Slope y) { return x && y ? Slope(op(BinaryOp::add, *x, *y)) : x ? x : y; }
  Slope subtract(Slope x, Slope y) {
    if (!y) return x;
    return x ? op(BinaryOp::sub, *x, *y) : op(UnaryOp::neg, *y);
  }
  Slope scaled(Slope x, ValueId by) { return x ? Slope(times(*x, by)) : x; }

  /// x * by, and 0 where x is 0 even if `by` is not finite there.
  ValueId guarded(ValueId x, ValueId by) {
    const ValueId zero = number(0);
    return select(module_, op(BinaryOp::equal, x, zero), zero, times(x, by));
  }

  Slope slope(const Constant&) { return {}; }
  Slope slope(const Input&) { return {}; }
  Slope slope(const ReadArgument& read) { return read.argument == Argument::s ? Slope(number(1)) : Slope{}; }

  Slope slope(const Unary& unary) {
    const Slope inner = slopes_[unary.operand.row];
    if (!inner) return {};
    if (unary.op == UnaryOp::abs) return slope_of_abs(unary.operand, *inner);
    if (unary.op == UnaryOp::floor || unary.op == UnaryOp::logical_not) return {};
    return slope_of(unary.op, unary.operand, *inner);
  }

  Slope slope_of_abs(ValueId x, ValueId dx) {
    const ValueId zero = number(0);
    const ValueId away = select(module_, op(BinaryOp::less, x, zero), op(UnaryOp::neg, dx), dx);
    return select(module_, op(BinaryOp::equal, x, zero), op(UnaryOp::abs, dx), away);
  }

  Slope slope_of(UnaryOp kind, ValueId x, ValueId dx) {
    switch (kind) {
      case UnaryOp::neg: return op(UnaryOp::neg, dx);
      case UnaryOp::exp: return times(dx, self_);
      case UnaryOp::ln: return guarded(dx, op(BinaryOp::div, number(1), x));
      case UnaryOp::log10: return guarded(dx, op(BinaryOp::div, number(1 / std::log(10.0)), x));
      case UnaryOp::sqrt: return guarded(dx, op(BinaryOp::div, number(0.5), self_));
      case UnaryOp::sin: return times(dx, op(UnaryOp::cos, x));
      case UnaryOp::cos: return op(UnaryOp::neg, times(dx, op(UnaryOp::sin, x)));
      case UnaryOp::tan: return times(dx, op(BinaryOp::add, number(1), times(self_, self_)));
      case UnaryOp::asin: return guarded(dx, op(BinaryOp::div, number(1), circle(x)));
      case UnaryOp::acos: return guarded(dx, op(BinaryOp::div, number(-1), circle(x)));
      case UnaryOp::atan: return op(BinaryOp::div, dx, op(BinaryOp::add, number(1), times(x, x)));
      case UnaryOp::sinh: return times(dx, op(UnaryOp::cosh, x));
      case UnaryOp::cosh: return times(dx, op(UnaryOp::sinh, x));
      case UnaryOp::tanh: return times(dx, op(BinaryOp::sub, number(1), times(self_, self_)));
      case UnaryOp::abs:
      case UnaryOp::floor:
      case UnaryOp::logical_not: return {};
    }
    return {};
  }

  /// sqrt((1 - x)(1 + x)), accurate near the ends.
  ValueId circle(ValueId x) {
    const ValueId one = number(1);
    return op(UnaryOp::sqrt, times(op(BinaryOp::sub, one, x), op(BinaryOp::add, one, x)));
  }

  Slope slope(const Binary& binary) {
    const ValueId x = binary.lhs, y = binary.rhs;
    const Slope dx = slopes_[x.row], dy = slopes_[y.row];
    if (!dx && !dy) return {};
    switch (binary.op) {
      case BinaryOp::add: return add(dx, dy);
      case BinaryOp::sub: return subtract(dx, dy);
      case BinaryOp::mul: return add(scaled(dx, y), scaled(dy, x));
      case BinaryOp::div: return op(BinaryOp::div, *subtract(dx, scaled(dy, self_)), y);
      case BinaryOp::pow: return add(power_by_base(x, y, dx), power_by_exponent(x, dy));
      case BinaryOp::mod: return subtract(dx, scaled(dy, op(UnaryOp::floor, op(BinaryOp::div, x, y))));
      case BinaryOp::min:
      case BinaryOp::max: return slope_of_choice(binary, plain(dx), plain(dy));
      case BinaryOp::less:
      case BinaryOp::less_equal:
      case BinaryOp::equal:
      case BinaryOp::not_equal:
      case BinaryOp::logical_and:
      case BinaryOp::logical_or: return {};
    }
    return {};
  }

  /// y x^(y-1) dx.
  Slope power_by_base(ValueId x, ValueId y, Slope dx) {
    if (!dx) return {};
    const auto exponent = constant_of(module_, y);
    if (exponent == 2) return times(*dx, times(number(2), x));
    const ValueId lower = exponent ? number(*exponent - 1) : op(BinaryOp::sub, y, number(1));
    const ValueId outer = times(y, op(BinaryOp::pow, x, lower));
    return exponent && *exponent >= 1 ? times(*dx, outer) : guarded(*dx, outer);
  }

  /// x^y ln(x) dy, taken as 0 where x^y is.
  Slope power_by_exponent(ValueId x, Slope dy) {
    if (!dy) return {};
    return guarded(*dy, guarded(self_, op(UnaryOp::ln, x)));
  }

  /// At a tie min goes on with the smaller slope, max with the larger.
  Slope slope_of_choice(const Binary& choice, ValueId dx, ValueId dy) {
    const ValueId x = choice.lhs, y = choice.rhs;
    const ValueId first = choice.op == BinaryOp::min ? op(BinaryOp::less, x, y) : op(BinaryOp::less, y, x);
    const ValueId apart = select(module_, first, dx, dy);
    return select(module_, op(BinaryOp::equal, x, y), op(choice.op, dx, dy), apart);
  }

  Slope slope(const Select& choice) {
    const Slope a = slopes_[choice.then_value.row], b = slopes_[choice.else_value.row];
    if (!a && !b) return {};
    const ValueId then_slope = plain(a), else_slope = plain(b);
    return select(module_, just_after(choice.condition), then_slope, else_slope);
  }

  /// The truth of a condition at s + 0.
  ValueId just_after(ValueId condition) {
    const Op asked = module_.values[condition.row].op;
    if (const auto* negated = std::get_if<Unary>(&asked)) return op(UnaryOp::logical_not, just_after(negated->operand));
    if (const auto* chosen = std::get_if<Select>(&asked)) {
      const ValueId first = just_after(chosen->then_value), second = just_after(chosen->else_value);
      return select(module_, just_after(chosen->condition), first, second);
    }
    const auto* compared = std::get_if<Binary>(&asked);
    if (!compared) return condition;
    if (compared->op == BinaryOp::logical_and || compared->op == BinaryOp::logical_or) {
      const ValueId first = just_after(compared->lhs), second = just_after(compared->rhs);
      return op(compared->op, first, second);
    }
    return comparison_just_after(condition, *compared);
  }

  ValueId comparison_just_after(ValueId condition, const Binary& compared) {
    const Slope dx = slopes_[compared.lhs.row], dy = slopes_[compared.rhs.row];
    if (!dx && !dy) return condition;
    const ValueId tie = op(BinaryOp::equal, compared.lhs, compared.rhs);
    const ValueId slopes_compared = op(compared.op, plain(dx), plain(dy));
    return select(module_, tie, slopes_compared, condition);
  }

  Slope slope(const TableRead& read) {
    const Slope dx = slopes_[read.x.row];
    if (!dx || read.order >= 3) return {};
    TableRead steeper = read;
    ++steeper.order;
    return times(*dx, append(module_, steeper));
  }

  Module module_;
  std::vector<Slope> slopes_;
  ValueId self_;
};

}  // namespace

Module differentiate(const Module& module) { return Differentiator(module).run(); }

}  // namespace tarn::compiler
