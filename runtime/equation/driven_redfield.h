#pragma once
/// \file The second-order equation that follows the drive: Redfield's with the memory of the baths integrated along
/// the actual H(t), by auxiliary operators.
///
/// With C_c(t) = sum_k c_k exp(-nu_k t), for every exponential
///   dX_k/dt = A_c - nu_k X_k - i [H(t), X_k],   Lam_c = sum_k c_k X_k + rest_c A_c,
///   d rho/dt = -i [H, rho] - sum_c [A_c, Lam_c rho - rho Lam_c^dagger] + jumps.
/// X_k is int_0^t dt' exp(-nu_k (t - t')) U(t, t') A_c U(t, t')^dagger: exact in the drive, second order in the coupling
/// (the time-local form; IBM J. Res. Dev. 1, 19 (1957) for a static H at long times; J. Chem. Phys. 111, 3365
/// (1999) for auxiliary operators). Not completely positive.

#include "lang/support/result.h"
#include "runtime/equation/open_system.h"

namespace tarn::runtime {

/// What the baths know at the start: nothing (system and baths are brought together at t = 0), or all that a
/// static system at the first s would have told them.
enum class StartingMemory : std::uint8_t { none, settled };

/// Bytes that a propagation takes.
double driven_redfield_bytes(const OpenSystem& system);

/// One propagation, any dimension. `visit` gets a Density. Errors: not_finite, step_underflow, interrupted. Trace and
/// Hermiticity hold to rounding.
Result<Counters, RunError> propagate_driven_redfield(const OpenSystem& system, const MemoryRun& run, const Density& initial,
                                                     StartingMemory memory, const Visit& visit,
                                                     const Interrupted& interrupted);

}  // namespace tarn::runtime
