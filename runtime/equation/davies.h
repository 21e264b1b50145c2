#pragma once
/// \file Davies' equation in instantaneous levels, along a pace.
///
/// Ramps are walked on the nodes of a track, which every run of the same chip shares. One step of
/// length h turns the state by the exact rotation of the levels with its fast phases integrated
/// (each element of the rotation times sin(x)/x of half the phase it collects: the Filon rule of
/// order 2), lets it relax at the middle, and turns it on. Steps are not bound to the phases.
/// A hold is one exponential, block by block. The run is repeated with halved steps and
/// extrapolated until the answers agree to the tolerance; where steps are bound to miss it, the
/// same equation is integrated explicitly (davies_explicit.h).
/// Sources: Commun. Math. Phys. 39, 91 (1974); New J. Phys. 14, 123016 (2012); oscillating
/// propagators: Numer. Math. 94, 289 (2003).

#include <complex>
#include <functional>
#include <memory>
#include <vector>

#include "lang/support/result.h"
#include "runtime/equation/davies_table.h"
#include "runtime/equation/propagate.h"
#include "runtime/equation/timeline.h"
#include "runtime/levels/track.h"

namespace tarn::runtime {

/// The generator at the middle of every step of a track, made when asked for: depends on
/// track and baths alone. Shared between runs and threads.
template <class Scalar>
class DaviesTables {
 public:
  /// `baths` has one entry for every coupling. Tables are kept while there is `memory`; none: all of them.
  DaviesTables(std::shared_ptr<const Track<Scalar>> track, std::vector<BathFunctions> baths,
               std::shared_ptr<MemoryBudget> memory = {});

  const Track<Scalar>& track() const { return *track_; }
  std::span<const BathFunctions> baths() const { return baths_; }
  /// One table for each step of `steps`, which are those of track().stretch(interval, depth). Null if `interrupted`
  /// before they were made.
  std::shared_ptr<const std::vector<DaviesTable>> of_steps(std::size_t interval, int depth, const Steps<Scalar>& steps,
                                                           const Interrupted& interrupted = {}) const;

 private:
  using Kept = KeptByDepth<std::vector<DaviesTable>, Track<Scalar>::kMaxDepth>;
  std::shared_ptr<const Track<Scalar>> track_;
  std::vector<BathFunctions> baths_;
  std::vector<std::unique_ptr<Kept>> kept_;  ///< Of each base interval.
};

/// rate (L rho L^dagger - {L^dagger L, rho}/2) as written, beside the baths.
struct LabJump {
  Eigen::MatrixXcd op;  ///< N x N, computational basis.
  double rate = 0;      ///< 1/ns
};

/// A Hermitian N x N term that depends on the time itself [rad/ns, t in ns]; empty: none. It drives the state
/// and enters no level and no rate.
using Drive = std::function<Eigen::MatrixXcd(double t)>;

struct DaviesRun {
  Timeline timeline;
  Density initial;            ///< N x N, computational basis, trace 1.
  std::vector<double> times;  ///< Where the state is wanted, ascending, within the timeline [ns].
  std::vector<LabJump> jumps;
  Drive drive;
};

struct DaviesOptions {
  int first_depth = 0;      ///< Steps of a base interval in the first pass: 2^first_depth.
  int last_depth = 9;       ///< Refinement stops here.
  double max_steps = 4e5;   ///< No pass of more steps than this.
  double max_explicit_phase = 4e5;  ///< No explicit integration over more phase than this [rad].
  Interrupted interrupted;
};

/// What one pass with fixed steps gave.
struct DaviesPass {
  std::vector<Density> states;  ///< At the times wanted, computational basis, N x N.
  std::vector<double> floor;    ///< At each time: an error that finer passes would share, of a population or an element.
  double leakage = 0;           ///< Population that leaves the levels kept: an upper estimate.
  Counters counters;
};

/// One pass at a depth, without extrapolation: trace-preserving, completely positive. `explicitly`: every
/// segment by the explicit integrator, at explicit_tolerance(depth).
/// Errors: `s_out_of_range` (the pace leaves the track), `interrupted`, `too_many_levels` (jumps as
/// written or a drive with levels left out), `too_much_phase`, `step_underflow`.
template <class Scalar>
Result<DaviesPass, RunError> davies_pass(const DaviesTables<Scalar>& tables, const DaviesRun& run, int depth,
                                         const DaviesOptions& options, bool explicitly = false);

}  // namespace tarn::runtime
