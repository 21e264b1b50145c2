#pragma once
/// \file The chip with Lindblad operators in the computational basis:
/// d rho/dt = -i [H, rho] + sum_j (L_j rho L_j^dagger - {L_j^dagger L_j, rho}/2), hbar = 1.
/// Source: Commun. Math. Phys. 48, 119 (1976).
///
/// The compiled Liouvillian acts on 2^(2n) numbers: element (row, column) of rho stands at
/// row 2^n + column.

#include <span>
#include <vector>

#include "lang/support/result.h"
#include "runtime/equation/propagate_linear.h"

namespace tarn::runtime {

/// Evolves `initial` (2^n x 2^n) and calls `visit` with a Density at every requested time.
/// `entries` are those of generator kLiouvillian with lanes = 1.
/// Accuracy: the error of rho in the Frobenius norm is a few run.tolerance at most; trace and
/// Hermiticity hold to rounding, small negative eigenvalues are of the size of the error.
/// Errors: not_finite, step_underflow, interrupted.
Result<Counters, RunError> propagate_lindblad(const Entries& entries, const tarn_block& block,
                                              const LinearRun& run, const Density& initial,
                                              const Visit& visit, const Interrupted& interrupted);

/// The same for up to W points at once; `block` has the inputs of every lane, `visits` one function a
/// point. A point's bits do not depend on the other points.
std::vector<Result<Counters, RunError>> propagate_lindblad_lanes(
    const Entries& entries, const tarn_block& block, std::span<const LinearRun> runs,
    std::span<const Density> initial, std::span<const Visit> visits, const Interrupted& interrupted);

}  // namespace tarn::runtime
