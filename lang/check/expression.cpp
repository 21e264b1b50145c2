#include "lang/check/expression.h"

#include <cmath>

#include "lang/check/arithmetic.h"
#include "lang/check/path.h"
#include "lang/check/readings.h"
#include "lang/check/remedies.h"
#include "lang/check/turns.h"
#include "lang/program/operators.h"
#include "lang/quantities/constants.h"
#include "lang/quantities/unit_slips.h"
#include "lang/support/check.h"

namespace tarn {
namespace {

void warn_unit_slip(Session& session, const ast::UnitText& unit) {
  const UnitSlip* slip = find_unit_slip(unit.text);
  if (slip == nullptr) return;
  session.report(unit.span, diag::unit_slip, slip->written, slip->is).remedy(fmt::format("did you mean `{}`?", slip->meant));
}

Value number_literal(Session& session, const ast::Number& number, Span span) {
  if (number.unit) warn_unit_slip(session, *number.unit);
  const bool integer = number.text.find_first_not_of("0123456789") == std::string::npos;
  if (!number.unit && integer && number.value < 9e15) return count_value(static_cast<std::int64_t>(number.value));
  const Unit unit = number.unit ? number.unit->unit : Unit{};
  return number_value(session.graph.constant(number.value * unit.factor, unit.dimension, span));
}

Value evaluate_choice(Session& session, const Scope& scope, const ast::Choice& choice, Span span) {
  const auto condition = evaluate_truth(session, scope, choice.condition);
  if (condition && session.graph[*condition].op == NodeOp::constant) {
    return evaluate(session, scope, session.graph[*condition].number != 0 ? choice.yes : choice.no);
  }
  const Operand yes{evaluate(session, scope, choice.yes), span_of(session, scope, choice.yes)};
  const Operand no{evaluate(session, scope, choice.no), span_of(session, scope, choice.no)};
  return condition ? select(session, *condition, yes, no, span) : Value{};
}

bool is_product(const Ast& ast, ast::ExprId id) {
  const auto& binary = std::get<ast::Binary>(ast.expr(id).node);
  return binary.op == ast::BinaryOp::multiply || binary.op == ast::BinaryOp::divide;
}

/// A chain a + b - c ... leans to the left as deep as it is long, so it is walked, not descended.
Value evaluate_chain(Session& session, const Scope& scope, ast::ExprId id) {
  const Ast& ast = session.ast(scope);
  std::vector<ast::ExprId> spine;
  while (const auto* binary = std::get_if<ast::Binary>(&ast.expr(id).node)) {
    spine.push_back(id);
    id = binary->left;
  }
  Operand left{evaluate(session, scope, id), ast.expr(id).span};
  for (auto at = spine.rbegin(); at != spine.rend(); ++at) {
    const ast::Expr& expr = ast.expr(*at);
    const auto& binary = std::get<ast::Binary>(expr.node);
    if (!session.step(expr.span)) return {};
    const Operand right{evaluate(session, scope, binary.right), ast.expr(binary.right).span};
    left = {apply(session, binary.op, left, right, expr.span), expr.span};
    const bool ends = at + 1 == spine.rend() || !is_product(ast, *(at + 1));
    if (is_product(ast, *at) && ends && !check_turns(session, scope, *at, left.value)) left.value = {};
  }
  return left.value;
}

Value evaluate_use(Session& session, const Scope& scope, const ast::Use& use) {
  if (!use.held.empty()) {
    session.report(use.held.front().span, diag::not_available, "`when`", "population(ground), population(state(...))");
    return {};
  }
  if (use.under) return evaluate_under(session, scope, use);
  return evaluate_path(session, scope, use.path);
}

Value evaluate_node(Session& session, const Scope& scope, ast::ExprId id) {
  const ast::Expr& expr = session.ast(scope).expr(id);
  if (const auto* number = std::get_if<ast::Number>(&expr.node)) return number_literal(session, *number, expr.span);
  if (const auto* text = std::get_if<ast::Text>(&expr.node)) return {TextValue{insert_counts(session, scope, *text)}};
  if (const auto* ketbra = std::get_if<ast::Ketbra>(&expr.node)) {
    return evaluate_ketbra(session, scope, *ketbra, expr.span);
  }
  if (const auto* use = std::get_if<ast::Use>(&expr.node)) return evaluate_use(session, scope, *use);
  if (const auto* unary = std::get_if<ast::Unary>(&expr.node)) {
    const Operand operand{evaluate(session, scope, unary->operand), span_of(session, scope, unary->operand)};
    return unary->op == ast::UnaryOp::negate ? negate(session, operand, expr.span)
                                             : logical_not(session, operand, expr.span);
  }
  if (const auto* choice = std::get_if<ast::Choice>(&expr.node)) {
    return evaluate_choice(session, scope, *choice, expr.span);
  }
  if (std::holds_alternative<ast::Binary>(expr.node)) return evaluate_chain(session, scope, id);
  return {};
}

}  // namespace

Value evaluate(Session& session, const Scope& scope, ast::ExprId id) {
  const Span span = span_of(session, scope, id);
  if (!session.step(span)) return {};
  if (session.depth >= kMaxDepth) {
    session.exhausted = true;
    session.report(span, diag::too_much_nesting);
    return {};
  }
  ++session.depth;
  Value value = evaluate_node(session, scope, id);
  --session.depth;
  return value;
}

Span span_of(const Session& session, const Scope& scope, ast::ExprId id) { return session.ast(scope).expr(id).span; }

Value number_value(NodeId node) { return {NumberValue{node}}; }
Value count_value(std::int64_t value) { return {CountValue{value, {}}}; }

std::optional<NodeId> to_number(Session& session, const Value& value, Span span) {
  if (const auto* number = value.get<NumberValue>()) return number->node;
  if (const auto* count = value.get<CountValue>()) {
    if (!count->value) return count->node;
    return session.graph.constant(static_cast<double>(*count->value), kNumber, span);
  }
  if (value.unknown()) return std::nullopt;
  auto tail = session.report(span, diag::wrong_kind, "a number", describe(value));
  const auto* callable = value.get<Callable>();
  if (callable != nullptr && callable->kind == CallableKind::schedule) {
    tail.remedy(fmt::format("a schedule is read at some s: `{}(s)`", item_name(*callable->item)->text));
  }
  return std::nullopt;
}

std::optional<CountValue> to_count(Session& session, const Value& value, Span span) {
  if (const auto* count = value.get<CountValue>()) return *count;
  if (value.unknown()) return std::nullopt;
  if (const auto* number = value.get<NumberValue>()) {
    const Node& node = session.graph[number->node];
    const bool integral = node.op == NodeOp::constant && node.number == std::floor(node.number) && std::abs(node.number) < 9e15;
    if (integral && node.dimension.is_number()) return CountValue{static_cast<std::int64_t>(node.number), {}};
    if (session.generic && node.dimension.is_number() && node.op != NodeOp::constant) return CountValue{std::nullopt, number->node};
  }
  auto tail = session.report(span, diag::count_needed, describe(value));
  const auto* number = value.get<NumberValue>();
  if (number != nullptr && session.graph[number->node].op == NodeOp::parameter) {
    tail.remedy(fmt::format("declare it as `{} : count`", excerpt(session, span)));
  }
  return std::nullopt;
}

bool require_dimension(Session& session, NodeId node, Dimension expected, Span span) {
  const Dimension found = session.graph[node].dimension;
  if (found == expected) return true;
  session.report(span, diag::dimension_mismatch, expected, found, excerpt(session, span))
      .remedy(dimension_remedy(session, span, expected, found));
  return false;
}

std::optional<NodeId> evaluate_number(Session& session, const Scope& scope, ast::ExprId id) {
  return to_number(session, evaluate(session, scope, id), span_of(session, scope, id));
}

std::optional<NodeId> evaluate_quantity(Session& session, const Scope& scope, ast::ExprId id, Dimension expected) {
  const auto node = evaluate_number(session, scope, id);
  if (!node || !require_dimension(session, *node, expected, span_of(session, scope, id))) return std::nullopt;
  return node;
}

std::optional<NodeId> evaluate_truth(Session& session, const Scope& scope, ast::ExprId id) {
  const Value value = evaluate(session, scope, id);
  if (const auto* truth = value.get<TruthValue>()) return truth->node;
  if (!value.unknown()) session.report(span_of(session, scope, id), diag::wrong_kind, "a truth", describe(value));
  return std::nullopt;
}

std::optional<std::int64_t> evaluate_count(Session& session, const Scope& scope, ast::ExprId id) {
  const auto count = to_count(session, evaluate(session, scope, id), span_of(session, scope, id));
  return count ? count->value : std::nullopt;
}

std::optional<double> evaluate_constant(Session& session, const Scope& scope, ast::ExprId id, Dimension expected) {
  const auto node = evaluate_quantity(session, scope, id, expected);
  if (!node) return std::nullopt;
  if (session.graph[*node].op == NodeOp::constant) return session.graph[*node].number;
  session.report(span_of(session, scope, id), diag::constant_needed, excerpt(session, span_of(session, scope, id)));
  return std::nullopt;
}

std::optional<std::string> evaluate_text(Session& session, const Scope& scope, ast::ExprId id) {
  const Value value = evaluate(session, scope, id);
  if (const auto* text = value.get<TextValue>()) return text->text;
  if (!value.unknown()) session.report(span_of(session, scope, id), diag::wrong_kind, "a text", describe(value));
  return std::nullopt;
}

std::optional<std::string> insert_counts(Session& session, const Scope& scope, const ast::Text& text) {
  std::string result = text.literals.front();
  bool known = true;
  for (std::size_t k = 0; k < text.inserts.size(); ++k) {
    const ast::Name& name = text.inserts[k];
    const auto value = look_up(session, scope, name);
    if (!value) report_unknown_name(session, scope, name);
    const auto count = value ? to_count(session, *value, name.span) : std::nullopt;
    known = known && count && count->value;
    if (count && count->value) result += std::to_string(*count->value);
    result += text.literals[k + 1];
  }
  return known ? std::optional(result) : std::nullopt;
}

}  // namespace tarn
