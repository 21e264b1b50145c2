#pragma once
/// \file A bath of the plan at one grid point as a checked thermal bath.

#include <memory>
#include <span>
#include <vector>

#include "lang/support/result.h"
#include "runtime/bath/thermal_bath.h"
#include "runtime/experiment/functions.h"

namespace tarn::runtime {

/// Bath `row` of the plan with the numbers of a grid point. A density that was not recognised is
/// read from the kernel; `functions` is kept alive for it and is not changed any more.
/// Error: `bad_bath`, with the bath's place and what is wrong with its numbers.
Result<ThermalBath, RunError> make_bath(const Plan& plan, std::uint32_t row, std::span<const double> settings,
                                        std::shared_ptr<const Functions> functions);

/// `bad_bath` with the fault in the units results are shown in (mK, GHz).
RunError bath_error(const Plan& plan, std::uint32_t row, const BathError& error);

/// Numbers that two points must share, bit by bit, for the bath to be the same.
std::vector<double> bath_fingerprint(const Plan& plan, std::uint32_t row, std::span<const double> settings,
                                     const Functions& functions);

}  // namespace tarn::runtime
