#pragma once
/// \file Adaptive integration of dy/dt = f(t, y) by the explicit pair 8(5,3), on W systems at once.
///
/// The W lanes are independent initial value problems with one right-hand side: each has its own
/// times, tolerance and step; a lane that is done or has failed idles. Nothing of a lane's result
/// depends on the others: every bit is the same whatever they do. W = 1 is the plain case.
///
/// Error of a step: with e5, e3 the norms of the embedded estimates of order 5 and 3, the estimate is
/// e5^2 / sqrt(e5^2 + e3^2 / 100), in the plain 2-norm of the state. It may be tolerance x
/// min(1, 128 x step / duration), and 1/256 of the tolerance at least, so that the errors of all steps
/// together stay within a few tolerances up to 3e4 steps and grow with their number beyond, as long
/// as f does not blow errors up. On 48 random anneals over 1 to 1000 periods the error at the end was
/// at most 9 tolerances, for tolerances from 1e-4 to 1e-9; rounding adds about 1e-15 a step.
/// Source of the estimate: Solving Ordinary Differential Equations I (Springer, 1993), II.10.

#include <complex>
#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <span>
#include <vector>

#include "runtime/integrate/comoving.h"
#include "runtime/integrate/counters.h"
#include "runtime/integrate/failure.h"
#include "runtime/integrate/vectors.h"

namespace tarn::runtime {

/// Where the right-hand side will be evaluated next.
struct Nodes {
  std::size_t count = 0;
  std::span<const double> t;           ///< t[node W + lane] [ns].
  std::span<const std::size_t> piece;  ///< piece[lane]: which piece the lane is on.
};

/// The right-hand side, for all lanes in one call.
struct RightHandSide {
  /// Gets ready for evaluations at these nodes, which replace the earlier ones. Sets bad[lane] where
  /// f has no finite value.
  std::function<void(const Nodes& nodes, bool* bad)> nodes;
  /// argument = sum_j weights[j W + lane] vectors[j] for j < count, derivative = f(t[node], argument).
  /// The outputs overlap nothing; every array starts at a multiple of 64 bytes.
  std::function<void(std::size_t node, std::size_t count, const double* weights,
                     const double* const* vectors, double* argument, double* derivative)>
      stage;
};

/// What one lane has to do.
struct LaneTask {
  /// Boundaries of the pieces on which f is smooth, ascending; the first is where the lane starts,
  /// the last where it ends. No step crosses a boundary. Fewer than two: the lane idles.
  std::span<const double> boundaries;
  /// Times at which the state is asked for, ascending, within the boundaries.
  std::span<const double> times;
  double tolerance = 1e-8;
  /// Over what time the tolerance is spent [ns]; 0 is from the first boundary to the last.
  double duration = 0;
};

/// Called with a lane, the index of a requested time, and an array whose lane holds the state there.
using OnTime = std::function<void(std::size_t lane, std::size_t index, const double* state)>;

/// comoving: for dy/dt = -i H y with Hermitian H and pairs of real and imaginary part. Every step is
/// taken on exp(i theta) y with theta' the mean energy at its start, which is exact and lets steps be
/// as long as the spread of the energies allows. Measured on anneals: 1.8 to 4 times fewer evaluations.
enum class Phase : std::uint8_t { fixed, comoving };

class ExplicitIntegrator {
 public:
  /// `size` doubles a lane; `lanes` divides 8.
  ExplicitIntegrator(std::size_t size, std::size_t lanes, Phase phase = Phase::fixed);

  /// The states, interleaved by lanes: set before run(), at the end times after it. A lane that
  /// failed holds its state at the last good step.
  double* state() { return vectors_[0].data(); }

  /// One task and one answer a lane; an empty answer is success. Steps of an earlier run are the
  /// first guess of the next. Whether to stop is asked before each step, of large systems before each stage.
  std::vector<std::optional<Failure>> run(const RightHandSide& f, std::span<const LaneTask> tasks,
                                          const OnTime& on_time, const Interrupted& interrupted);

  const Counters& counters(std::size_t lane) const { return lanes_[lane].counters; }

 private:
  struct Lane {
    bool active = false;
    bool fresh = false;        ///< The derivative at t is not known.
    bool ends_piece = false;   ///< This step ends on a boundary.
    bool accepted = false;
    double t = 0, step = 0;    ///< `step` is what is tried next; 0 when unknown.
    double next_t = 0, trial = 0;
    double last_log_ratio = -9.2;  ///< Of error over tolerance, last accepted step.
    bool just_rejected = false;
    std::size_t piece = 0, next_time = 0;
    double energy = 0;                ///< Taken out of the derivatives of this step [rad/ns].
    std::complex<double> phase = 1;   ///< The solution is phase times the state.
    std::optional<Failure> failure;
    Counters counters;
  };

  double* row(std::size_t index);
  double* stage_row(std::size_t stage);
  void start(std::span<const LaneTask> tasks, const OnTime& on_time);
  bool any_active() const;
  void fail(Lane& lane, FailureKind kind);
  void stop_all(FailureKind kind);
  void announce(const RightHandSide& f, std::span<const double> c);
  void evaluate(const RightHandSide& f, std::size_t stage, std::size_t node, double* argument);
  void refresh(const RightHandSide& f, std::span<const LaneTask> tasks);
  void follow_energy();
  const double* solution();
  void settle_phases(std::span<const LaneTask> tasks);
  void choose_steps(std::span<const LaneTask> tasks);
  bool attempt(const RightHandSide& f, const Interrupted& interrupted);
  void judge(std::span<const LaneTask> tasks);
  void judge_lane(Lane& lane, double ratio, double shortest);
  bool interpolate(const RightHandSide& f, std::span<const LaneTask> tasks, const OnTime& on_time,
                   const Interrupted& interrupted);
  bool stops_within(const Interrupted& interrupted) const;
  void combine_interpolant(const double* x);
  void advance(std::span<const LaneTask> tasks, const OnTime& on_time);
  void report_until(std::size_t l, const LaneTask& task, const OnTime& on_time);

  std::size_t size_, width_, length_;
  Phase phase_;
  std::vector<AlignedArray> vectors_;  ///< y, k0..k15, next y, argument.
  std::vector<Lane> lanes_;
  std::vector<double> node_times_;
  AlignedArray weights_;
  Pack trials_{};               ///< Step of every lane.
  TurnWeights energies_{};      ///< Of the present trial.
  std::vector<std::size_t> pieces_;
};

}  // namespace tarn::runtime
