#pragma once
/// \file Quantum trajectories: pure states that evolve without a jump until their squared norm has fallen to a
/// number drawn uniformly, then make a jump drawn by its rate and start anew. The mean of their projectors is the
/// density matrix of the equation.
/// Sources: J. Opt. Soc. Am. B 10, 524 (1993); Rev. Mod. Phys. 70, 101 (1998).
///
/// Draws (draws.h): trajectory i takes number 0 for its first waiting time, then one number for each jump and one for
/// the next waiting time. Starts are spread evenly over the mixture (systematic sampling): trajectory i of n starts
/// from the ket in which (i + v)/n falls among the weights added up, v being one draw: every weight is met to within
/// one trajectory.

#include <cstdint>
#include <functional>
#include <span>

#include "lang/support/result.h"
#include "runtime/equation/propagate.h"
#include "runtime/equation/timeline.h"
#include "runtime/trajectories/unravelling.h"

namespace tarn::runtime {

struct TrajectoryRun {
  const Timeline* timeline = nullptr;
  std::span<const double> breaks;   ///< Where some schedule has a kink [ns], ascending.
  std::span<const double> times;    ///< Where the states are asked for [ns], ascending, within the timeline.
  std::span<const Ket> kets;        ///< Of the mixture at the start, norm 1.
  std::span<const double> weights;  ///< Theirs, positive, sum 1.
  std::size_t count = 1;            ///< Trajectories.
  std::uint64_t seed = 0;
  /// A state that makes no jump errs by a few times this at most, in the 2-norm; a jump comes where the squared
  /// norm agrees with what was drawn to this part of it.
  double tolerance = 1e-8;
  std::size_t jobs = 1;             ///< Threads. They change no bit.
};

/// Index of a requested time, the trajectory, and its state, of norm 1. Called from the caller's thread: times
/// ascending, and for each all trajectories ascending.
using VisitTrajectory = std::function<void(std::size_t index, std::size_t trajectory, const State& state)>;

struct TrajectoryCounters {
  Counters steps;
  std::uint64_t jumps = 0;
};

/// Errors: not_finite, step_underflow, interrupted.
Result<TrajectoryCounters, RunError> propagate_trajectories(const Unravelling& model, const TrajectoryRun& run,
                                                            const VisitTrajectory& visit, const Interrupted& interrupted);

}  // namespace tarn::runtime
