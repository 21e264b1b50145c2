#include "lang/check/turns.h"

#include <cmath>

#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/quantities/constants.h"

namespace tarn {
namespace {

/// The factors 2 and pi of a product, as far as they are written out.
struct Turn {
  bool two = false, pi = false;
  bool in_rad = false;      ///< `pi rad`
  std::optional<Span> mark; ///< Where pi stands.

  bool complete() const { return two && pi; }
};

bool is_pi(const ast::ExprNode& node) {
  const auto* use = std::get_if<ast::Use>(&node);
  return use != nullptr && use->path.steps.size() == 1 && use->path.steps[0].name.text == "pi" && !use->path.call;
}

/// Takes a factor 2, pi, pi rad, 3.14 or 6.28; false for every other factor.
bool take(const ast::Expr& factor, Turn& turn) {
  constexpr double kRounded = 0.002;  // 3.14 and 6.28 are pi and 2 pi to two digits.
  const auto* number = std::get_if<ast::Number>(&factor.node);
  const bool in_rad = number != nullptr && number->unit && number->unit->text == "rad";
  if (number != nullptr && number->unit && !in_rad) return false;
  const bool two = number != nullptr && !in_rad && number->value == 2;
  const bool whole = number != nullptr && std::abs(number->value - 2 * kPi) < 2 * kRounded;
  const bool pi = is_pi(factor.node) || (number != nullptr && std::abs(number->value - kPi) < kRounded);
  if (!two && !whole && !pi) return false;
  turn.two = turn.two || two || whole;
  turn.pi = turn.pi || pi || whole;
  turn.in_rad = turn.in_rad || in_rad;
  if (pi || whole) turn.mark = factor.span;
  return true;
}

std::optional<Dimension> dimension_of(const Session& session, const Value& value) {
  if (const auto* number = value.get<NumberValue>()) return session.graph[number->node].dimension;
  if (const auto* op = value.get<OperatorValue>()) return op->dimension;
  if (value.get<CountValue>()) return kNumber;
  return std::nullopt;
}

/// `1 rad`, which takes the dimension of `pi rad` away, but not its 2 pi.
bool is_rad(const ast::ExprNode& node) {
  const auto* number = std::get_if<ast::Number>(&node);
  return number != nullptr && number->unit && number->unit->text == "rad";
}

/// One frequency beside times, hbar, `1 rad` and plain numbers; formulas of second order have more.
bool has_one_frequency(Session& session, const Scope& scope, const std::vector<ast::ExprId>& others) {
  int frequencies = 0;
  for (const ast::ExprId id : others) {
    if (is_rad(session.ast(scope).expr(id).node)) continue;
    const auto dimension = dimension_of(session, evaluate(session, scope, id));
    if (!dimension) return false;
    const bool plain = dimension->is_number() || *dimension == kTime || *dimension == kEnergy * kTime / kAngle;
    if (*dimension == kFrequency) ++frequencies;
    if (!plain && *dimension != kFrequency) return false;
  }
  return frequencies == 1;
}

bool counts_turns(Dimension dimension, bool in_formula) {
  return dimension == kAngle || (!in_formula && (dimension == kFrequency || dimension == kEnergy));
}

}  // namespace

bool check_turns(Session& session, const Scope& scope, ast::ExprId product, const Value& value) {
  const auto dimension = dimension_of(session, value);
  const bool in_formula = scope.site != nullptr && scope.site->formula;
  if (!dimension || dimension->is_number()) return true;
  const bool fits = counts_turns(*dimension, in_formula);
  const bool too_many = counts_turns(*dimension / kAngle, in_formula);
  if (!fits && !too_many) return true;
  const Ast& ast = session.ast(scope);
  Turn above, below;
  std::vector<ast::ExprId> others;
  for (const Factor& factor : factors_of(ast, product)) {
    if (!take(ast.expr(factor.id), factor.divides ? below : above)) others.push_back(factor.id);
  }
  const Turn& turn = above.complete() ? above : below;
  if (!turn.complete() || (!fits && !turn.in_rad)) return true;
  const std::pair place(turn.mark->file.row, turn.mark->begin);
  if (session.turns.contains(place)) return fits;
  if (!has_one_frequency(session, scope, others)) return true;
  session.turns.insert(place);
  const Span span = ast.expr(product).span;
  constexpr std::string_view kRemedy = "leave out {}: a frequency counts its cycles as 2 pi rad already";
  if (fits) {
    session.report(span, diag::counted_twice, excerpt(session, span)).remedy(fmt::format(kRemedy, turn.in_rad ? "`2*pi rad` and `1 rad`" : "`2*pi`"));
    return true;
  }
  session.report(span, diag::dimension_mismatch, *dimension / kAngle, *dimension, excerpt(session, span))
      .remedy(fmt::format(kRemedy, "`2*pi rad`"));
  return false;
}

}  // namespace tarn
