#pragma once
/// \file Expressions to values.

#include <cstdint>
#include <optional>
#include <string>

#include "lang/check/session.h"

namespace tarn {

/// The value of an expression in a scope. Errors are reported and give Unknown.
Value evaluate(Session& session, const Scope& scope, ast::ExprId id);

// Each of these reports a value of another kind at the expression; nothing for Unknown too.

/// A number or a count, as a node.
std::optional<NodeId> evaluate_number(Session& session, const Scope& scope, ast::ExprId id);
/// A number of this dimension.
std::optional<NodeId> evaluate_quantity(Session& session, const Scope& scope, ast::ExprId id, Dimension expected);
std::optional<NodeId> evaluate_truth(Session& session, const Scope& scope, ast::ExprId id);
/// A known integer.
std::optional<std::int64_t> evaluate_count(Session& session, const Scope& scope, ast::ExprId id);
/// A number of this dimension that depends on no parameter.
std::optional<double> evaluate_constant(Session& session, const Scope& scope, ast::ExprId id, Dimension expected);
std::optional<std::string> evaluate_text(Session& session, const Scope& scope, ast::ExprId id);

std::optional<NodeId> to_number(Session& session, const Value& value, Span span);
std::optional<CountValue> to_count(Session& session, const Value& value, Span span);
/// Reports unless the node has this dimension; the remedy names the factor that is missing.
bool require_dimension(Session& session, NodeId node, Dimension expected, Span span);

/// The text with its counts inserted; nothing if one of them is not known.
std::optional<std::string> insert_counts(Session& session, const Scope& scope, const ast::Text& text);

Value number_value(NodeId node);
Value count_value(std::int64_t value);

/// The span of an expression, for messages.
Span span_of(const Session& session, const Scope& scope, ast::ExprId id);

}  // namespace tarn
