#include "lang/check/arithmetic.h"

#include <cmath>
#include <limits>

#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/program/operators.h"
#include "lang/quantities/constants.h"
#include "lang/support/check.h"

namespace tarn {
namespace {

using ast::BinaryOp;

bool mixable(Dimension a, Dimension b) {
  const auto energetic = [](Dimension d) { return d == kEnergy || d == kFrequency; };
  return energetic(a) && energetic(b);
}

Value truth(Session& session, NodeOp op, NodeId a, NodeId b, Span span) {
  return {TruthValue{session.graph.add({.op = op, .a = a, .b = b, .truth = true, .span = span})}};
}

Value report_operands(Session& session, std::string_view symbol, const Operand& left, const Operand& right) {
  const bool first = left.value.get<OperatorValue>() != nullptr;
  const bool second = right.value.get<OperatorValue>() != nullptr;
  const bool numbers = left.value.get<NumberValue>() || left.value.get<CountValue>() ||
                       right.value.get<NumberValue>() || right.value.get<CountValue>();
  auto tail = session.report(cover(left.span, right.span), diag::wrong_operands, std::string(symbol),
                             describe(left.value), describe(right.value));
  if (first != second && numbers && symbol != "/") tail.remedy("multiply the number by `I`");
  for (const Operand* operand : {&left, &right}) {
    const auto* callable = operand->value.get<Callable>();
    if (callable == nullptr || callable->kind != CallableKind::schedule) continue;
    tail.remedy(fmt::format("a schedule is read at some s: `{}(s)`", excerpt(session, operand->span)));
  }
  return {};
}

std::string_view symbol(BinaryOp op) {
  switch (op) {
    case BinaryOp::add: return "+";
    case BinaryOp::subtract: return "-";
    case BinaryOp::multiply: return "*";
    case BinaryOp::divide: return "/";
    case BinaryOp::power: return "^";
    case BinaryOp::less_equal: return "<=";
    case BinaryOp::greater_equal: return ">=";
    case BinaryOp::equal: return "==";
    case BinaryOp::not_equal: return "!=";
    case BinaryOp::less: return "<";
    case BinaryOp::greater: return ">";
    case BinaryOp::logical_and: return "and";
    case BinaryOp::logical_or: return "or";
  }
  return "";
}

/// Exact arithmetic of known counts; nothing where the result is no count.
std::optional<std::int64_t> count_result(BinaryOp op, std::int64_t a, std::int64_t b) {
  std::int64_t result = 0;
  if (op == BinaryOp::add) return __builtin_add_overflow(a, b, &result) ? std::nullopt : std::optional(result);
  if (op == BinaryOp::subtract) return __builtin_sub_overflow(a, b, &result) ? std::nullopt : std::optional(result);
  if (op == BinaryOp::multiply) return __builtin_mul_overflow(a, b, &result) ? std::nullopt : std::optional(result);
  if (op != BinaryOp::power || b < 0 || b > 62) return std::nullopt;
  result = 1;
  for (std::int64_t k = 0; k < b; ++k) {
    if (__builtin_mul_overflow(result, a, &result)) return std::nullopt;
  }
  return result;
}

/// Of counts that are not known: the node, as a count again.
Value opaque_count(const Value& number) {
  const auto* node = number.get<NumberValue>();
  return node == nullptr ? Value{} : Value{CountValue{std::nullopt, node->node}};
}

bool unlike(Session& session, const Operand& left, Dimension expected, const Operand& right, Dimension found) {
  if (expected == found) return false;
  auto tail = session.report(right.span, diag::dimension_mismatch, expected, found, excerpt(session, right.span));
  tail.note(left.span, fmt::format("this is {}", expected));
  // A plain number beside a quantity lacks its unit, whichever of the two it is.
  Span at = right.span;
  if (found.is_number()) at = first_factor(session, at);
  const std::string remedy = dimension_remedy(session, at, expected, found);
  const std::string lacking = expected.is_number() && found != kTime ? unit_remedy(session, first_factor(session, left.span), found) : std::string();
  tail.remedy(lacking.empty() ? remedy : lacking);
  return true;
}

Value add_numbers(Session& session, NodeOp op, NodeId a, NodeId b, const Operand& left, const Operand& right, Span span) {
  const Dimension dimension = session.graph[a].dimension;
  if (unlike(session, left, dimension, right, session.graph[b].dimension)) return {};
  return make_number(session, op, a, b, dimension, span);
}

Value power(Session& session, NodeId base, NodeId exponent, const Operand& right, Span span) {
  const Dimension dimension = session.graph[base].dimension;
  if (!require_dimension(session, exponent, kNumber, right.span)) return {};
  if (dimension.is_number()) return make_number(session, NodeOp::pow, base, exponent, kNumber, span);
  const Node power_node = session.graph[exponent];
  const auto fraction = power_node.op == NodeOp::constant ? nearest_rational(power_node.number) : std::nullopt;
  if (!fraction) {
    session.report(right.span, diag::power_of_dimension, dimension);
    return {};
  }
  return make_number(session, NodeOp::pow, base, exponent, pow(dimension, *fraction), span);
}

Value combine_numbers(Session& session, BinaryOp op, NodeId a, NodeId b, const Operand& left, const Operand& right,
                      Span span) {
  const Dimension first = session.graph[a].dimension;
  const Dimension second = session.graph[b].dimension;
  switch (op) {
    case BinaryOp::add: return add_numbers(session, NodeOp::add, a, b, left, right, span);
    case BinaryOp::subtract: return add_numbers(session, NodeOp::sub, a, b, left, right, span);
    case BinaryOp::multiply: return make_number(session, NodeOp::mul, a, b, first * second, span);
    case BinaryOp::divide: return make_number(session, NodeOp::div, a, b, first / second, span);
    case BinaryOp::power: return power(session, a, b, right, span);
    case BinaryOp::less_equal:
    case BinaryOp::greater_equal:
    case BinaryOp::equal:
    case BinaryOp::not_equal:
    case BinaryOp::less:
    case BinaryOp::greater:
    case BinaryOp::logical_and:
    case BinaryOp::logical_or: break;
  }
  if (unlike(session, left, first, right, second)) return {};
  if (op == BinaryOp::less) return truth(session, NodeOp::less, a, b, span);
  if (op == BinaryOp::greater) return truth(session, NodeOp::less, b, a, span);
  if (op == BinaryOp::less_equal) return truth(session, NodeOp::less_equal, a, b, span);
  if (op == BinaryOp::greater_equal) return truth(session, NodeOp::less_equal, b, a, span);
  return truth(session, op == BinaryOp::equal ? NodeOp::equal : NodeOp::not_equal, a, b, span);
}

Value bounded(Session& session, Operator terms, Dimension dimension, Span span) {
  if (terms.size() > kMaxOperatorTerms) {
    session.report(span, diag::operator_too_large, kMaxOperatorTerms);
    return {};
  }
  return {OperatorValue{std::move(terms), dimension}};
}

Value add_operators(Session& session, BinaryOp op, const Operand& left, const Operand& right, Span span) {
  const auto& a = *left.value.get<OperatorValue>();
  const auto& b = *right.value.get<OperatorValue>();
  Dimension dimension = a.dimension;
  if (mixable(a.dimension, b.dimension)) {
    if (a.dimension != b.dimension) dimension = kFrequency;
  } else if (unlike(session, left, a.dimension, right, b.dimension)) {
    return {};
  }
  const Operator second = op == BinaryOp::subtract ? scaled(b.terms, -1) : b.terms;
  return bounded(session, sum(a.terms, second), dimension, span);
}

Value operator_power(Session& session, const OperatorValue& base, const Operand& right, Span span) {
  const auto* exponent = right.value.get<CountValue>();
  if (exponent == nullptr || !exponent->value || *exponent->value < 1 || *exponent->value > 16) {
    session.report(right.span, diag::operator_power);
    return {};
  }
  OperatorValue result = base;
  for (std::int64_t k = 1; k < *exponent->value; ++k) {
    result.terms = product(session.graph, result.terms, base.terms, span);
    result.dimension = result.dimension * base.dimension;
    if (result.terms.size() > kMaxOperatorTerms) break;
  }
  return bounded(session, std::move(result.terms), result.dimension, span);
}

/// At least one side is an operator.
Value combine_operators(Session& session, BinaryOp op, const Operand& left, const Operand& right, Span span) {
  const auto* a = left.value.get<OperatorValue>();
  const auto* b = right.value.get<OperatorValue>();
  if (a != nullptr && b != nullptr) {
    if (op == BinaryOp::add || op == BinaryOp::subtract) return add_operators(session, op, left, right, span);
    if (op != BinaryOp::multiply) return report_operands(session, symbol(op), left, right);
    if (a->terms.size() * b->terms.size() > kMaxOperatorTerms) return bounded(session, Operator(kMaxOperatorTerms + 1), {}, span);
    return bounded(session, product(session.graph, a->terms, b->terms, span), a->dimension * b->dimension, span);
  }
  if (op == BinaryOp::power && a != nullptr) return operator_power(session, *a, right, span);
  const bool scales = op == BinaryOp::multiply || (op == BinaryOp::divide && a != nullptr);
  const Value& other = a != nullptr ? right.value : left.value;
  if (!scales || !(other.get<NumberValue>() || other.get<CountValue>())) {
    return report_operands(session, symbol(op), left, right);
  }
  const auto factor = to_number(session, other, a != nullptr ? right.span : left.span);
  if (!factor) return {};
  const Dimension dimension = session.graph[*factor].dimension;
  if (op == BinaryOp::divide) {
    return bounded(session, divided(session.graph, a->terms, *factor, span), a->dimension / dimension, span);
  }
  const OperatorValue& scaled_one = a != nullptr ? *a : *b;
  return bounded(session, times(session.graph, scaled_one.terms, *factor, span), scaled_one.dimension * dimension, span);
}

Value combine_truths(Session& session, BinaryOp op, const Operand& left, const Operand& right, Span span) {
  const auto* a = left.value.get<TruthValue>();
  const auto* b = right.value.get<TruthValue>();
  if (a == nullptr || b == nullptr) return report_operands(session, symbol(op), left, right);
  if (op == BinaryOp::logical_and) return truth(session, NodeOp::logical_and, a->node, b->node, span);
  if (op == BinaryOp::logical_or) return truth(session, NodeOp::logical_or, a->node, b->node, span);
  if (op == BinaryOp::equal) return truth(session, NodeOp::equal, a->node, b->node, span);
  if (op == BinaryOp::not_equal) return truth(session, NodeOp::not_equal, a->node, b->node, span);
  return report_operands(session, symbol(op), left, right);
}

Value combine_texts(Session& session, BinaryOp op, const Operand& left, const Operand& right, Span span) {
  const auto& a = left.value.get<TextValue>()->text;
  const auto& b = right.value.get<TextValue>()->text;
  if (op != BinaryOp::equal && op != BinaryOp::not_equal) return report_operands(session, symbol(op), left, right);
  if (!a || !b) return {};
  const bool holds = (*a == *b) == (op == BinaryOp::equal);
  return {TruthValue{session.graph.add({.number = holds ? 1.0 : 0.0, .truth = true, .span = span})}};
}

/// A verdict is an order of three, no amount.
Value compare_verdicts(Session& session, BinaryOp op, const Operand& left, const Operand& right, Span span) {
  const auto* a = left.value.get<VerdictValue>();
  const auto* b = right.value.get<VerdictValue>();
  const auto is_word = [&](const VerdictValue* verdict) {
    return verdict != nullptr && session.graph[verdict->node].op == NodeOp::constant;
  };
  const bool equal = op == BinaryOp::equal && a != nullptr && b != nullptr && (is_word(a) || is_word(b));
  const bool ordered = op == BinaryOp::less_equal && a != nullptr && is_word(b);
  if (equal || ordered) return truth(session, equal ? NodeOp::equal : NodeOp::less_equal, a->node, b->node, span);
  session.report(span, diag::verdict_comparison, excerpt(session, span)).remedy("`verdict == within`, `verdict <= marginal`");
  return {};
}

}  // namespace

Value make_number(Session& session, NodeOp op, NodeId a, NodeId b, Dimension dimension, Span span) {
  if (!dimension.valid()) {
    session.report(span, diag::dimension_too_large);
    return {};
  }
  Node node{.op = op, .a = a, .dimension = dimension, .span = span};
  if (operand_count(op) > 1) node.b = b;
  const NodeId id = session.graph.add(node);
  const Node& made = session.graph[id];
  if (made.op == NodeOp::constant && !std::isfinite(made.number)) {
    session.report(span, diag::not_finite, excerpt(session, span));
    return {};
  }
  return {NumberValue{id}};
}

Value negate(Session& session, const Operand& operand, Span span) {
  if (operand.value.unknown()) return {};
  if (const auto* count = operand.value.get<CountValue>(); count != nullptr && count->value) {
    return count_value(-*count->value);
  }
  if (const auto* op = operand.value.get<OperatorValue>()) return {OperatorValue{scaled(op->terms, -1), op->dimension}};
  const auto node = to_number(session, operand.value, operand.span);
  if (!node) return {};
  const Value result = make_number(session, NodeOp::neg, *node, {}, session.graph[*node].dimension, span);
  return operand.value.get<CountValue>() ? opaque_count(result) : result;
}

Value logical_not(Session& session, const Operand& operand, Span span) {
  if (operand.value.unknown()) return {};
  const auto* value = operand.value.get<TruthValue>();
  if (value == nullptr) {
    session.report(operand.span, diag::wrong_kind, "a truth", describe(operand.value));
    return {};
  }
  return {TruthValue{session.graph.add({.op = NodeOp::logical_not, .a = value->node, .truth = true, .span = span})}};
}

Value apply(Session& session, ast::BinaryOp op, const Operand& left, const Operand& right, Span span) {
  if (left.value.unknown() || right.value.unknown()) return {};
  if (left.value.get<OperatorValue>() || right.value.get<OperatorValue>()) {
    return combine_operators(session, op, left, right, span);
  }
  if (left.value.get<VerdictValue>() || right.value.get<VerdictValue>()) {
    return compare_verdicts(session, op, left, right, span);
  }
  if (left.value.get<TruthValue>() || right.value.get<TruthValue>()) {
    return combine_truths(session, op, left, right, span);
  }
  if (left.value.get<TextValue>() && right.value.get<TextValue>()) {
    return combine_texts(session, op, left, right, span);
  }
  const auto* a = left.value.get<CountValue>();
  const auto* b = right.value.get<CountValue>();
  const bool logical = op == BinaryOp::logical_and || op == BinaryOp::logical_or;
  const auto is_numeric = [](const Value& value) { return value.get<CountValue>() || value.get<NumberValue>(); };
  if (logical || !is_numeric(left.value) || !is_numeric(right.value)) {
    return report_operands(session, symbol(op), left, right);
  }
  if (a != nullptr && b != nullptr && a->value && b->value) {
    if (const auto count = count_result(op, *a->value, *b->value)) return count_value(*count);
  }
  const auto x = to_number(session, left.value, left.span);
  const auto y = to_number(session, right.value, right.span);
  if (!x || !y) return {};
  const Value result = combine_numbers(session, op, *x, *y, left, right, span);
  const bool closed = op == BinaryOp::add || op == BinaryOp::subtract || op == BinaryOp::multiply;
  const bool unknown_count = a != nullptr && b != nullptr && (!a->value || !b->value);
  return closed && unknown_count ? opaque_count(result) : result;
}

Value select(Session& session, NodeId condition, const Operand& yes, const Operand& no, Span span) {
  if (yes.value.unknown() || no.value.unknown()) return {};
  Graph& graph = session.graph;
  if (const auto* a = yes.value.get<TruthValue>(); a != nullptr && no.value.get<TruthValue>() != nullptr) {
    const NodeId b = no.value.get<TruthValue>()->node;
    return {TruthValue{graph.add({.op = NodeOp::select, .a = condition, .b = a->node, .c = b, .truth = true, .span = span})}};
  }
  if (yes.value.get<OperatorValue>() && no.value.get<OperatorValue>()) {
    const NodeId one = graph.constant(1, kNumber, span);
    const NodeId zero = graph.constant(0, kNumber, span);
    const auto weighted = [&](const Operand& side, NodeId first, NodeId second) {
      const auto& op = *side.value.get<OperatorValue>();
      const NodeId weight = graph.add({.op = NodeOp::select, .a = condition, .b = first, .c = second, .span = span});
      return Operand{{OperatorValue{times(graph, op.terms, weight, span), op.dimension}}, side.span};
    };
    return add_operators(session, BinaryOp::add, weighted(yes, one, zero), weighted(no, zero, one), span);
  }
  const bool counts = yes.value.get<CountValue>() && no.value.get<CountValue>();
  const auto a = to_number(session, yes.value, yes.span);
  const auto b = to_number(session, no.value, no.span);
  if (!a || !b) return {};
  const Dimension dimension = graph[*a].dimension;
  if (unlike(session, yes, dimension, no, graph[*b].dimension)) return {};
  const NodeId node = graph.add({.op = NodeOp::select, .a = condition, .b = *a, .c = *b, .dimension = dimension, .span = span});
  return counts && session.generic ? Value{CountValue{std::nullopt, node}} : number_value(node);
}

}  // namespace tarn
