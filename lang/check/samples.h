#pragma once
/// \file Numbers at the parameters' values: what checking can know before a run.

#include <optional>
#include <vector>

#include "lang/check/session.h"

namespace tarn {

/// Points of [0, 1] at which schedules are tried.
inline constexpr int kScheduleSamples = 257;

/// True if all that the node reads is known here: no opaque argument, no parameter without value.
bool is_known(const Session& session, NodeId node);

/// Value at the parameters' values (s, t, w at 0); nothing if it is not known.
std::optional<double> value_at_defaults(const Session& session, NodeId node);

/// Reports nodes that are not finite somewhere on [0, 1] at the parameters' values, at the
/// innermost expression where it happens. Nodes that are not known are left out.
void report_not_finite_in_s(Session& session, const std::vector<NodeId>& nodes);

/// Reports a density that is negative or not finite at some w > 0.
void report_bad_density(Session& session, NodeId density, Span span);

}  // namespace tarn
