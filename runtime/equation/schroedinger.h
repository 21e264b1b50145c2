#pragma once
/// \file The closed chip: d psi/dt = -i H(s(t), t) psi, hbar = 1.

#include <span>
#include <vector>

#include "lang/support/result.h"
#include "runtime/equation/propagate_linear.h"

namespace tarn::runtime {

/// Evolves `initial` (2^bits amplitudes) and calls `visit` with a Ket at every requested time.
/// `entries` are those of generator kSchroedinger with lanes = 1.
/// Accuracy: the error of psi is a few run.tolerance at most, and so is the drift of its norm.
/// Errors: not_finite, step_underflow, interrupted.
Result<Counters, RunError> propagate_schroedinger(const Entries& entries, const tarn_block& block,
                                                  const LinearRun& run, const Ket& initial,
                                                  const Visit& visit, const Interrupted& interrupted);

/// The same for up to W points at once; `block` has the inputs of every lane, `visits` one function a
/// point. A point's bits do not depend on the other points.
std::vector<Result<Counters, RunError>> propagate_schroedinger_lanes(
    const Entries& entries, const tarn_block& block, std::span<const LinearRun> runs,
    std::span<const Ket> initial, std::span<const Visit> visits, const Interrupted& interrupted);

}  // namespace tarn::runtime
