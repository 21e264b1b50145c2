#pragma once
/// \file Davies' equation step by step, phases and all: for drives in t, for jumps as written, and
/// where the steps of davies.h miss the tolerance. Costs a diagonalisation an evaluation.

#include <optional>
#include <span>
#include <vector>

#include "runtime/equation/davies.h"

namespace tarn::runtime {

template <class Scalar>
struct ExplicitSegment {
  const DaviesTables<Scalar>& tables;
  Segment segment;
  const std::vector<LabJump>& jumps;
  const Drive& drive;
};

using StateAt = std::function<void(double t, const Density& state)>;

/// Local tolerance of the explicit integrator in place of a depth: a factor of 30 a depth.
double explicit_tolerance(int depth);

/// Carries `state` (N x N, computational basis) over the segment by the Dormand-Prince pair of order 5(4) (J. Comput. Appl. Math. 6, 19
/// (1980)) with the local error below `tolerance` a step; a static segment with more than 1000 rad
/// of phase, no drive and N <= 16 by one matrix exponential of the whole map. `visit` sees the state at each of
/// `times`, which ascend and end with the segment. Errors: `too_much_phase` (more than
/// options.max_explicit_phase), `step_underflow`, `interrupted`.
template <class Scalar>
std::optional<RunError> integrate_explicitly(const ExplicitSegment<Scalar>& task, std::span<const double> times,
                                             double tolerance, const DaviesOptions& options,
                                             Density& state, const StateAt& visit, Counters& counters);

}  // namespace tarn::runtime
