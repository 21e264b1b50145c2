#pragma once
/// \file Calls of schedules, spectra and functions.

#include "lang/check/session.h"

namespace tarn {

/// Value of a law at its bound arguments; reports one that calls itself.
Value call_law(Session& session, const Callable& callable, Span span);

/// A spectrum named without w: its value at the spectrum argument of the site.
Value spectrum_at(Session& session, const Callable& callable, NodeId w, Span span);

/// The name a law's first argument must have: s, w, f; empty for a function.
std::string_view first_argument(CallableKind kind);

/// Checks a law by itself, its arguments opaque, and a schedule on [0, 1] where all it needs is
/// known. Returns its value, if it has one.
std::optional<NodeId> check_law(Session& session, const Callable& callable);

}  // namespace tarn
