#pragma once
/// \file Moments against a pace whose numbers are all constant.

#include "lang/check/experiment.h"

namespace tarn {

/// Reports at `where` a moment that the pace never has: a t after its end, an s it does not meet. Where a
/// parameter takes part, in the pace or in the moment, the run decides.
void check_moment(Session& session, const ast::Observe& observe, Span where, const MomentI& moment, const Instance& instance);

}  // namespace tarn
