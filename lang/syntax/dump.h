#pragma once
/// \file The tree as text: `tarn emit --stage syntax`. Two texts with one dump mean the same.
///
/// A line a construct, its parts indented; operations in prefix form:
///
///     parameter ta
///       default 100 ns
///       range 1 ns .. 1 ms
///     schedule drive
///       arg s
///       value (* 6 GHz (^ (- 1 s) 2))

#include <string>

#include "lang/syntax/ast.h"

namespace tarn {

/// Parentheses, spans and comments are left out; documentation is not.
std::string dump(const Ast& ast);

/// One expression in prefix form.
std::string dump(const Ast& ast, ast::ExprId id);

/// `cell[k].q[i]`, with arguments if it is a call.
std::string dump(const Ast& ast, const ast::Path& path);

/// A text with its inserts, in quotes.
std::string dump(const ast::Text& text);

}  // namespace tarn
