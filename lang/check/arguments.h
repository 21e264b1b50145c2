#pragma once
/// \file Arguments of laws, baths, kinds and chips: given, defaulted, checked against their types.

#include <optional>
#include <string>
#include <vector>

#include "lang/check/session.h"

namespace tarn {

/// What a declared type asks for.
struct DeclaredType {
  enum class Kind : std::uint8_t { quantity, count, truth, text, part } kind = Kind::quantity;
  Dimension dimension;
  CallableKind part = CallableKind::qubit;
};
/// Reports a word that is no type.
std::optional<DeclaredType> declared_type(Session& session, const ast::TypeText& type);

/// Name of the declaration behind a callable.
std::string callable_name(const Callable& callable);
const std::vector<ast::Arg>& arguments_of(const Callable& callable);
Span declaration_span(const Callable& callable);

/// Binds what a call gives, by place or by name; `skip` leaves out the first arguments (w of a
/// spectrum that a bath names). Reports names that are none, arguments given twice or in excess.
void bind_given(Session& session, const Scope& scope, Callable& callable, const ast::Path& path, std::size_t skip);

/// Declares every argument in `into`: what is bound, else its default. False where one is
/// missing (reported at `span`).
bool complete_arguments(Session& session, const Callable& callable, Scope& into, Span span);

/// Declares every argument as an opaque value of its declared dimension; one without dimension
/// or default as Unknown: it is checked where it is used.
void declare_opaque(Session& session, const Callable& callable, Scope& into);

/// True if every argument has a default.
bool all_defaulted(const std::vector<ast::Arg>& args);

/// For dumps: `h : number`.
std::string type_text(Session& session, const ast::Arg& arg);

}  // namespace tarn
