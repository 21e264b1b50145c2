#pragma once
/// \file dy/dt = G(s(t), t) y for a compiled generator G, along a timeline: what the equations in the
/// computational basis share. W points go together where the kernel has lane entries.
///
/// Pieces that move are integrated by the explicit pair 8(5,3). Pieces in which nothing changes are one
/// exponential where that is cheaper: dense up to 64 amplitudes, a Chebyshev series above. Sudden steps
/// leave the state as it is. Nothing is renormalised.

#include <cstdint>
#include <span>
#include <vector>

#include "runtime/abi/kernel.h"
#include "runtime/equation/propagate.h"
#include "runtime/equation/timeline.h"
#include "runtime/integrate/explicit.h"

namespace tarn::runtime {

/// The entries of one generator. `values` is that of set kCoefficients.
struct Entries {
  tarn_values_fn values = nullptr;
  tarn_stage_fn stage = nullptr;
  tarn_apply_fn apply = nullptr;
  const double* prepared = nullptr;  ///< As TARN_PREPARE filled it.
  std::uint32_t rows = 0;            ///< Of set kCoefficients.
  std::uint32_t bits = 0;            ///< Vectors have 2^bits amplitudes.
  std::uint32_t lanes = 1;           ///< 1 with apply and stage, the kernel's W with their lane versions.
  bool reads_t = false;              ///< Some coefficient depends on t itself: no piece is still.
};

/// skew: G = -G^dagger, so that norms stay. damped: a Liouvillian.
enum class Flow : std::uint8_t { skew, damped };

/// One point: where it goes, when it is looked at, how exactly.
struct LinearRun {
  const Timeline* timeline = nullptr;
  std::span<const double> breaks;  ///< Where some schedule has a kink [ns], ascending.
  std::span<const double> times;   ///< Where the state is asked for [ns], ascending, within the timeline.
  /// The error of the state at the end, in the 2-norm, is a few times this at most.
  double tolerance = 1e-8;
};

struct LinearOutcome {
  std::optional<Failure> failure;
  Counters counters;
};

/// Up to `lanes` runs at once; `initial` holds their states interleaved (2^bits pairs a lane).
/// `on_time` gets lane, index of the time and an array whose lane holds the state.
std::vector<LinearOutcome> propagate_linear(const Entries& entries, const tarn_block& block, Flow flow,
                                            std::span<const LinearRun> runs,
                                            std::span<const double> initial, const OnTime& on_time,
                                            const Interrupted& interrupted);

}  // namespace tarn::runtime
