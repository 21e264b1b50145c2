#pragma once
/// \file One experiment of a program, for each combination of its swept counts.

#include "lang/check/check.h"

namespace tarn {

/// See instances(). `steps` counts the work done so far and goes on counting. A trial only
/// checks: parameters may lack their values.
std::vector<Instance> elaborate_experiment(const Program& program, std::uint32_t experiment, const Overrides& overrides,
                                           bool trial, std::uint64_t& steps, Diagnostics& diagnostics);

}  // namespace tarn
