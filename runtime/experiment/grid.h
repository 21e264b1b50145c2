#pragma once
/// \file The grid of an experiment: which values the swept parameters have at a grid index.

#include <cstdint>
#include <string>
#include <vector>

#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// Number of grid points; 1 without axes.
std::uint64_t grid_size(const std::vector<Axis>& axes);

/// Position along each axis of a grid index; the first axis is the slowest.
std::vector<std::size_t> grid_position(const std::vector<Axis>& axes, std::uint64_t index);

/// Values of all columns of all axes at a grid index, in the order of the sweeps, internal units.
std::vector<double> grid_values(const std::vector<Axis>& axes, std::uint64_t index);

/// At most `count` >= 1 indices below `size`, ascending, spread evenly with both ends.
std::vector<std::uint64_t> sample_of_grid(std::uint64_t size, std::uint64_t count);

}  // namespace tarn::runtime
