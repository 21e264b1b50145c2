#pragma once
/// \file Loops of placements and terms: `for i in 0 .. n-1 where i != 2`.

#include <functional>
#include <vector>

#include "lang/check/session.h"

namespace tarn {

/// Calls body(scope) for each combination, the first loop slowest. Bounds and conditions use
/// counts, indices and constants only. In a generic session a loop over counts that are not
/// known runs once, its names unknown counts.
void for_each(Session& session, const Scope& scope, const std::vector<ast::Loop>& loops,
              const std::function<void(const Scope&)>& body);

}  // namespace tarn
