#pragma once
/// \file Answers of one run under Davies' equation, each finer than the last, with what to hold it against.
///
/// A pass errs by the square of its step, and its steps are symmetric: two passes are extrapolated to an
/// answer of order 4. How far it is off shows, for any observable, in its distance from the coarser
/// answers that come with it. Weights were measured over random chips, paces and baths
/// (tests/program/error_coverage_test.cpp holds them on others).

#include <memory>
#include <optional>
#include <vector>

#include "runtime/equation/coarser_states.h"
#include "runtime/equation/davies.h"

namespace tarn::runtime {

struct DaviesAnswer {
  std::vector<Density> states;  ///< At the times wanted, computational basis, N x N.
  std::vector<CoarserStates> coarser;  ///< The error is the largest that any of these tells.
  std::vector<double> floor;    ///< At each time: what none of them can tell, of a population or an element.
  double leakage = 0;           ///< Population that leaves the levels kept: an upper estimate.
  Counters counters;            ///< Of the passes since the answer before.
};

/// The runs of one point; `tables` must outlive it.
template <class Scalar>
class DaviesRefinement {
 public:
  DaviesRefinement(const DaviesTables<Scalar>& tables, DaviesRun run, DaviesOptions options);

  /// The next answer. Precondition: !exhausted(). Errors: those of davies_pass. States keep their trace to 1e-12
  /// and are Hermitian; extrapolation leaves them positive to within the error.
  Result<DaviesAnswer, RunError> next();

  /// True once another answer would be no better or cost more than the options allow.
  bool exhausted() const { return exhausted_; }

 private:
  using States = std::vector<Density>;
  Result<DaviesAnswer, RunError> next_by_fast_steps();
  Result<DaviesAnswer, RunError> next_by_explicit_steps();
  Result<DaviesPass, RunError> pass(int depth, Counters& counters);
  void leave_fast_steps(const DaviesAnswer& answer);
  bool may_go_explicit() const;

  const DaviesTables<Scalar>& tables_;
  DaviesRun run_;
  DaviesOptions options_;
  bool explicitly_ = false, exhausted_ = false;
  int depth_ = 0;
  std::vector<States> plain_;  ///< Of the fast passes, coarsest first; the last three.
  std::vector<States> better_; ///< Extrapolated, likewise.
  std::optional<DaviesAnswer> fast_;  ///< The last by fast steps, once explicit ones are tried.
  std::optional<States> last_; ///< Of the explicit passes, or the last of the fast ones.
};

}  // namespace tarn::runtime
