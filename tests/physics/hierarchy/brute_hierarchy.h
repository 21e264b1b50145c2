#pragma once
/// \file The hierarchy written out once more: unscaled, one dense matrix for all, nothing shared with the runtime.

#include <Eigen/Core>

#include "runtime/equation/open_system.h"

namespace tarn::runtime::testing {

/// The state after `t` from `initial` under H(0, 0).
Density brute_hierarchy(const OpenSystem& system, int depth, const Density& initial, double t);

}  // namespace tarn::runtime::testing
