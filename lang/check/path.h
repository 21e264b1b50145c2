#pragma once
/// \file Paths as values: names, places' operators, calls.

#include "lang/check/session.h"

namespace tarn {

Value evaluate_path(Session& session, const Scope& scope, const ast::Path& path);

/// A path that names a declaration of one of these kinds, its arguments bound but not completed;
/// nothing if it is another thing (reported) or unknown.
std::optional<Callable> resolve_callable(Session& session, const Scope& scope, const ast::Path& path,
                                         std::initializer_list<CallableKind> kinds, std::string_view expected);

/// Letters of I X Y Z, or |ket><bra|, on the places given or on a kind's own qubits.
Value evaluate_letters(Session& session, const Scope& scope, const ast::Path& path);
Value evaluate_ketbra(Session& session, const Scope& scope, const ast::Ketbra& ketbra, Span span);

}  // namespace tarn
