#pragma once
/// \file Claims of an experiment: judged at every grid point, instant of a trace or s of a scan.
///
/// A comparison's margin is the distance to the limit on the side that was claimed; its error bar
/// is what the errors of the observables can move it by, added up. A margin inside its error bar
/// decides nothing, and the claim fails there: the tool cannot vouch for it.

#include <functional>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "lang/support/result.h"
#include "runtime/experiment/outcome.h"

namespace tarn::runtime {

enum class Verdict : std::uint8_t { holds, fails, undecided };

/// Values of all rows of kClaims for given values of the observables at (s, t).
using ClaimRows =
    std::function<Result<std::vector<double>, RunError>(std::span<const double> observables, Instant at)>;

/// One place where a claim was judged.
struct Judgement {
  Verdict verdict = Verdict::holds;  ///< undecided: the error straddles the limit.
  double margin = 0;                 ///< > 0 if it holds; of the weakest comparison. +-infinity for truths.
  double error = 0;                  ///< Error bar of the margin.
};

/// What one claim came to over the points of one plan or of the whole grid.
struct ClaimTally {
  std::uint64_t selected = 0;        ///< Places where `where` holds, or may hold within its error.
  std::uint64_t holding = 0, failing = 0, straddling = 0;
  std::uint64_t valueless = 0;       ///< Of those straddling: an observable has no value there.
  std::optional<Judgement> weakest;  ///< The smallest margin met, and where.
  std::uint64_t weakest_point = 0;   ///< Grid index.
  std::string weakest_equation;      ///< Its label, where several are compared.
  std::optional<Instant> weakest_at; ///< The instant, of a claim on a trace or a scan.
};

/// A claim's final word.
struct ClaimReport {
  std::string text;
  Place place;
  Verdict verdict = Verdict::holds;
  std::string reason;                ///< Empty if it holds.
  ClaimTally tally;
};

/// Judges one tree at one place. `values` and `errors` are those of all observables of the plan
/// (NaN: has none there).
Result<Judgement, RunError> judge(const ClaimNode& node, const ClaimRows& rows, std::span<const double> values,
                                  std::span<const double> errors, Instant at);

/// Adds every place of one point to the tally. A failed point counts as one failing place. `under`: the answers
/// that Plan::under names, at this point; `rows` gets them behind the plan's observables.
Result<Done, RunError> tally_point(const Plan& plan, const Claim& claim, const ClaimRows& rows,
                                   const PointOutcome& outcome, ClaimTally& tally, std::span<const Answer> under = {});

/// The final word. `sampled`: not the whole grid was run, so that only a failure is decided.
/// `unfinished`: likewise, for a run that was interrupted.
ClaimReport conclude(const Claim& claim, const ClaimTally& tally, bool sampled, bool unfinished);

const char* verdict_name(Verdict verdict);

}  // namespace tarn::runtime
