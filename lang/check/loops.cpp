#include "lang/check/loops.h"

#include <algorithm>

#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/check/tables.h"

namespace tarn {
namespace {

using Body = std::function<void(const Scope&)>;

void descend(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops, std::size_t depth, const Body& body);

bool condition_holds(Session& session, const Scope& scope, const ast::Loop& loop) {
  if (!loop.where) return true;
  const auto truth = evaluate_truth(session, scope, *loop.where);
  if (!truth) return false;
  const Node& node = session.graph[*truth];
  if (node.op == NodeOp::constant) return node.number != 0;
  if (session.generic) return true;
  const Span span = span_of(session, scope, *loop.where);
  session.report(span, diag::constant_needed, excerpt(session, span))
      .remedy("`where` of a loop uses counts, indices and constants");
  return false;
}

void visit(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops, std::size_t depth,
           const std::vector<Value>& values, const Body& body) {
  const ast::Loop& loop = loops[depth];
  Scope inner{&scope, scope.module, scope.site, {}};
  for (std::size_t k = 0; k < loop.names.size(); ++k) declare(session, inner, loop.names[k], values[k]);
  if (condition_holds(session, inner, loop)) descend(session, inner, loops, depth + 1, body);
}

Value opaque_index(Session& session, const ast::Name& name) {
  return {CountValue{std::nullopt, opaque_number(session, name.text, kNumber, name.span)}};
}

void over_range(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops, std::size_t depth, const Body& body) {
  const ast::Loop& loop = loops[depth];
  const auto low = to_count(session, evaluate(session, scope, loop.first), span_of(session, scope, loop.first));
  const auto high = to_count(session, evaluate(session, scope, *loop.last), span_of(session, scope, *loop.last));
  if (loop.names.size() != 1) {
    session.report(loop.names[1].span, diag::loop_names, counted(1, "name"), loop.names.size());
    return;
  }
  if (!low || !high) return;
  if (!low->value || !high->value) {
    visit(session, scope, loops, depth, {opaque_index(session, loop.names[0])}, body);
    return;
  }
  for (std::int64_t i = *low->value; i <= *high->value; ++i) {
    if (!session.step(loop.span)) return;
    visit(session, scope, loops, depth, {count_value(i)}, body);
  }
}

/// Which column each name reads: by name where all are names of columns, else in order.
std::optional<std::vector<std::size_t>> columns_of(Session& session, const ast::Loop& loop, const RowsValue& rows) {
  std::vector<std::size_t> result;
  for (const ast::Name& name : loop.names) {
    const auto found = std::find(rows.names.begin(), rows.names.end(), name.text);
    if (found != rows.names.end()) result.push_back(static_cast<std::size_t>(found - rows.names.begin()));
  }
  if (result.size() == loop.names.size()) return result;
  if (loop.names.size() != rows.names.size()) {
    session.report(cover(loop.names.front().span, loop.names.back().span), diag::loop_names, counted(rows.names.size(), "name"), loop.names.size());
    return std::nullopt;
  }
  result.clear();
  for (std::size_t k = 0; k < loop.names.size(); ++k) result.push_back(k);
  return result;
}

void over_rows(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops, std::size_t depth,
               const RowsValue& rows, const Body& body) {
  const auto columns = columns_of(session, loops[depth], rows);
  if (!columns) return;
  for (const std::vector<Value>& row : *rows.rows) {
    if (!session.step(loops[depth].span)) return;
    std::vector<Value> values;
    for (const std::size_t column : *columns) values.push_back(row[column]);
    visit(session, scope, loops, depth, values, body);
  }
}

void over_values(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops, std::size_t depth, const Body& body) {
  const ast::Loop& loop = loops[depth];
  const Value value = evaluate(session, scope, loop.first);
  if (const auto* rows = value.get<RowsValue>()) return over_rows(session, scope, loops, depth, *rows, body);
  if (value.unknown()) {
    if (session.generic) visit(session, scope, loops, depth, std::vector<Value>(loop.names.size()), body);
    return;
  }
  const Span span = span_of(session, scope, loop.first);
  const auto* list = value.get<ListValue>();
  if (list == nullptr) {
    session.report(span, diag::wrong_kind, "a list, rows of a table or a range", describe(value));
    return;
  }
  if (loop.names.size() != 1) {
    session.report(loop.names[1].span, diag::loop_names, counted(1, "name"), loop.names.size());
    return;
  }
  for (const Value& item : *list->items) {
    if (!session.step(loop.span)) return;
    visit(session, scope, loops, depth, {item}, body);
  }
}

void descend(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops, std::size_t depth, const Body& body) {
  if (depth == loops.size()) return body(scope);
  if (loops[depth].last) return over_range(session, scope, loops, depth, body);
  over_values(session, scope, loops, depth, body);
}

}  // namespace

void for_each(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops, const Body& body) {
  descend(session, scope, loops, 0, body);
}

}  // namespace tarn
