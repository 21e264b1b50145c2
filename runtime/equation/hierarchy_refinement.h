#pragma once
/// \file Answers of one run under the hierarchy, each one depth deeper than the last, with what to hold them against.
///
/// An answer of depth d is compared with that of depth d - 1, and with one of depth d from exponential sums that
/// represent the baths less well: the distance from there, times the ratio of the sums' own errors, tells what the
/// better sums still miss.

#include <limits>
#include <optional>
#include <vector>

#include "runtime/equation/coarser_states.h"
#include "runtime/equation/hierarchy.h"

namespace tarn::runtime {

struct HierarchyRun {
  Timeline timeline;
  std::optional<Density> initial;  ///< N x N, trace 1; the baths in equilibrium beside it. None: stationary at the first s.
  std::vector<double> times;       ///< Where the state is wanted [ns], ascending, within the timeline.
  std::vector<double> breaks;      ///< Where some schedule has a kink [ns], ascending.
};

struct HierarchyOptions {
  std::optional<int> depth;  ///< Of the one answer there is then; none: raised from answer to answer.
  int first_depth = 3;       ///< Of the first answer, >= 2.
  int last_depth = 60;
  double max_bytes = std::numeric_limits<double>::infinity();  ///< No hierarchy larger than this is tried.
  double tolerance = 1e-9;   ///< Of a step: MemoryRun::tolerance.
  /// The baths once more, less well represented (ExponentialSum::error larger). Empty: answers tell nothing of the sums' error.
  std::vector<ExponentialSum> coarser_baths;
  Interrupted interrupted;
};

struct HierarchyAnswer {
  std::vector<Density> states;         ///< At the times wanted, computational basis, N x N.
  std::vector<CoarserStates> coarser;  ///< The error is the largest that any of these tells.
  double floor = 0;                    ///< What none of them can tell, of a population or an element: the integration.
  int depth = 0;
  Counters counters;                   ///< Since the answer before.
};

/// The runs of one point.
class HierarchyRefinement {
 public:
  HierarchyRefinement(OpenSystem system, HierarchyRun run, HierarchyOptions options);

  /// The next answer. Precondition: !exhausted(). Errors: those of propagate_hierarchy and stationary_hierarchy, and `too_large`
  /// where not even the first depth fits into max_bytes.
  Result<HierarchyAnswer, RunError> next();

  /// True once another answer would be no better or larger than the options allow.
  bool exhausted() const { return exhausted_; }

 private:
  Result<std::vector<Density>, RunError> states_of(const OpenSystem& system, int depth, Counters& counters) const;

  OpenSystem system_, coarser_system_;
  HierarchyRun run_;
  HierarchyOptions options_;
  int depth_ = 0;              ///< Of the next answer.
  double ratio_ = 1;           ///< Error of the sums over that of the coarser ones.
  std::vector<Density> last_;  ///< At depth_ - 1.
  bool exhausted_ = false;
};

}  // namespace tarn::runtime
