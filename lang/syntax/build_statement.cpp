#include "lang/support/check.h"
#include "lang/syntax/builder.h"

namespace tarn {

ast::Experiment Builder::experiment(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  ast::Experiment result{span(id), name(parts.front()), {}, {}};
  for (std::size_t i = 1; i < parts.size(); ++i) result.statements.push_back(statement(parts[i]));
  return result;
}

ast::Statement Builder::statement(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  const Span place = span(id);
  const Tag tag = node(id).tag;
  if (tag == Tag::let) return let(id);
  if (tag == Tag::chip_use) return ast::ChipUse{place, path(parts.front())};
  if (tag == Tag::begin) return ast::Begin{place, expression(parts.front())};
  if (tag == Tag::pace) return pace(id);
  if (tag == Tag::equation) return equation(id);
  if (tag == Tag::levels) return levels(id);
  if (tag == Tag::draws) return draws(id);
  if (tag == Tag::observe) return observe(id);
  if (tag == Tag::scan) return ast::Scan{place, name(parts[0]), expression(parts[1])};
  if (tag == Tag::sweep) return sweep(id);
  if (tag == Tag::data) return ast::Data{place, name(parts[0]), path(parts[1])};
  if (tag == Tag::compare) return ast::Compare{place, name(parts[0]), name(parts[1])};
  if (tag == Tag::fit) return fit(id);
  if (tag == Tag::expect) {
    const ast::ExprId claim = expression(parts.front());
    return ast::Expect{place, claim, child_value(id, Tag::where)};
  }
  if (tag == Tag::tolerance) return ast::Tolerance{place, expression(parts.front())};
  throw InternalError("no statement");
}

ast::Pace Builder::pace(SyntaxNodeId id) {
  ast::Pace result{span(id), {}};
  for (const SyntaxNodeId c : children(id)) result.pieces.push_back(piece(c));
  return result;
}

ast::Piece Builder::piece(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  const Span place = span(id);
  const Tag tag = node(id).tag;
  if (tag == Tag::start_piece) return {place, ast::StartPiece{expression(parts[0])}};
  if (tag == Tag::ramp_piece) {
    const ast::ExprId s = expression(parts[0]);
    return {place, ast::RampPiece{s, expression(parts[1])}};
  }
  if (tag == Tag::hold_piece) return {place, ast::HoldPiece{expression(parts[0])}};
  if (tag == Tag::step_piece) return {place, ast::StepPiece{expression(parts[0])}};
  if (tag == Tag::follow_piece) return {place, ast::FollowPiece{path(parts[0])}};
  throw InternalError("no piece of a pace");
}

ast::EquationChoice Builder::equation_choice(SyntaxNodeId id) {
  ast::EquationChoice result{span(id), std::nullopt, {}};
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::name) {
      result.label = name(c);
    } else {
      result.equation = path(c);
    }
  }
  return result;
}

ast::Equation Builder::equation(SyntaxNodeId id) {
  ast::Equation result{span(id), false, {}};
  const SyntaxNodeId only = children(id).front();
  if (node(only).tag == Tag::each) {
    result.each = true;
    for (const SyntaxNodeId c : children(only)) result.choices.push_back(equation_choice(c));
  } else {
    result.choices.push_back({span(only), std::nullopt, path(only)});
  }
  return result;
}

ast::Levels Builder::levels(SyntaxNodeId id) {
  ast::Levels result{span(id), std::nullopt};
  for (const SyntaxNodeId c : children(id)) result.count = expression(c);
  return result;
}

ast::Draws Builder::draws(SyntaxNodeId id) {
  const Code word = first_code(id);
  const ast::DrawKind kind = word == Code::trajectories ? ast::DrawKind::trajectories
                             : word == Code::ensemble   ? ast::DrawKind::ensemble
                                                        : ast::DrawKind::freeze;
  const ast::ExprId count = expression(children(id).front());
  return {span(id), kind, count, child_value(id, Tag::seed)};
}

ast::AtPoint Builder::at_point(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  ast::AtPoint result{name(parts[0]), expression(parts[1]), ast::Meeting::unsaid};
  if (node(parts.back()).tag == Tag::first) result.meeting = ast::Meeting::first;
  if (node(parts.back()).tag == Tag::last) result.meeting = ast::Meeting::last;
  return result;
}

ast::Observe Builder::observe(SyntaxNodeId id) {
  ast::Observe result;
  result.span = span(id);
  for (const SyntaxNodeId c : children(id)) {
    const Tag tag = node(c).tag;
    if (tag == Tag::name) result.name = name(c);
    if (tag == Tag::value) result.value = expression(children(c).front());
    if (tag == Tag::unit_in) result.unit = unit(children(c).front());
    if (tag == Tag::at_end) result.when = ast::AtEnd{};
    if (tag == Tag::at_point) result.when = at_point(c);
    if (tag == Tag::along) result.when = ast::Along{expression(children(c).front())};
  }
  return result;
}

ast::Sweep Builder::sweep(SyntaxNodeId id) {
  ast::Sweep result{span(id), false, {}};
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::together) {
      result.together = true;
      continue;
    }
    const std::vector<SyntaxNodeId> parts = children(c);
    result.axes.push_back({span(c), path(parts[0]), expression(parts[1])});
  }
  return result;
}

ast::Fit Builder::fit(SyntaxNodeId id) {
  ast::Fit result;
  result.span = span(id);
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::path) result.parameters.push_back(path(c));
    if (node(c).tag == Tag::name) result.data = name(c);
    if (node(c).tag == Tag::fit_each) result.each = path(children(c).front());
  }
  return result;
}

}  // namespace tarn
