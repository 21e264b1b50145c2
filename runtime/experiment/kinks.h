#pragma once
/// \file Where the schedules of a chip have kinks at one grid point, as boundaries for steps.

#include <vector>

#include "runtime/equation/timeline.h"
#include "runtime/experiment/functions.h"

namespace tarn::runtime {

/// Values of s in [0, 1], ascending, where a row of set kKinks passes one of its levels. Found by
/// 1024 samples and bisection to rounding: two passages closer than that may be missed, and step
/// control is left with them.
std::vector<double> kink_positions(const std::vector<Kink>& kinks, const Functions& functions);

/// Qubits (by number) whose s + offset leaves [0, 1] somewhere on the timeline and is held there.
std::vector<std::size_t> held_offsets(const Chip& chip, const Timeline& timeline, std::span<const double> settings);

}  // namespace tarn::runtime
