#pragma once
/// \file dy/dt = f(s(t), t, y) along a timeline, for right-hand sides that are written out in C++: the explicit
/// pair 8(5,3), holds included. Sudden steps leave y as it is.

#include <functional>
#include <optional>
#include <span>

#include "runtime/equation/open_system.h"
#include "runtime/integrate/explicit.h"

namespace tarn::runtime {

struct SteppedEquation {
  /// Gets ready for evaluations at s and t under this number, 16 numbers at most; false where a coefficient is
  /// not finite.
  std::function<bool(std::size_t node, double s, double t)> prepare;
  /// d = f(y) at a number got ready before. Both at a multiple of 64 bytes.
  std::function<void(std::size_t node, const double* y, double* d)> derivative;
};

/// Index of a requested time and the state there.
using OnState = std::function<void(std::size_t index, const double* y)>;

/// From `initial` at the start of the timeline to its end. Adds to `counters`.
std::optional<Failure> integrate_along(const SteppedEquation& equation, const MemoryRun& run, bool reads_t,
                                       std::span<const double> initial, const OnState& on_state,
                                       const Interrupted& interrupted, Counters& counters);

}  // namespace tarn::runtime
