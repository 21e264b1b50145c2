#pragma once
/// \file What readings and beginnings ask of an equation's generator that stands still at one s.

#include <cstdint>
#include <functional>
#include <optional>

#include "lang/support/result.h"
#include "runtime/equation/propagate.h"
#include "runtime/generator/stationary.h"

namespace tarn::runtime {

class PointTask;

struct LevelPair {
  std::uint32_t row = 0, column = 0;
};

/// Both may be empty: the equation has no generator that stands still. Errors: those of making the generator,
/// `no_modes`, `no_steady_state`, `no_such_level`.
struct GeneratorAt {
  /// How |1><1| - |0><0| decays, or |row><column| of a pair.
  std::function<Result<Mode, RunError>(PointTask& task, double s, std::optional<LevelPair> pair)> mode;
  /// The stationary state, N x N, computational basis.
  std::function<Result<Density, RunError>(PointTask& task, double s)> steady;
};

inline RunError no_modes() { return {"no_modes", "the generator has no complete set of modes here, so that no decay time can be read off"}; }
inline RunError no_steady_state() { return {"no_steady_state", "the equation has no stationary state here, or more than one: something does not relax"}; }

}  // namespace tarn::runtime
