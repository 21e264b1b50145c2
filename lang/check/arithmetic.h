#pragma once
/// \file The operations of the language on values, with their rules for dimensions.

#include <string>
#include <vector>

#include "lang/check/session.h"

namespace tarn {

/// A value and where it was written.
struct Operand {
  Value value;
  Span span;
};

Value negate(Session& session, const Operand& operand, Span span);
Value logical_not(Session& session, const Operand& operand, Span span);
Value apply(Session& session, ast::BinaryOp op, const Operand& left, const Operand& right, Span span);
Value select(Session& session, NodeId condition, const Operand& yes, const Operand& no, Span span);

/// Elementary functions: exp, cos, min, clamp ... Precondition: is_function(name).
bool is_function(std::string_view name);
Value call_function(Session& session, std::string_view name, const std::vector<Operand>& arguments, Span span);

/// Adds a node of the graph; reports a constant that is not finite.
Value make_number(Session& session, NodeOp op, NodeId a, NodeId b, Dimension dimension, Span span);

}  // namespace tarn
