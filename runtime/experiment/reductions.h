#pragma once
/// \file lowest, highest and final of series, and observables made of them.

#include <vector>

#include "runtime/experiment/accuracy.h"
#include "runtime/experiment/functions.h"

namespace tarn::runtime {

/// Rows of set kObservables for given readings at an instant. `functions` is changed in its
/// reading inputs and must outlive the result.
ObservableRows observable_rows(const Plan& plan, Functions& functions, Instant at);

/// An observable that waits for reductions: its instants, and its other readings there with the
/// errors they have.
struct Waiting {
  std::uint32_t observable = 0;
  std::vector<Instant> instants;
  std::vector<std::vector<Measured>> readings;  ///< At each instant, one for each reading of the plan.
};

/// Fills the series of `waiting` in an order in which each finds what it reduces. The error is the
/// sum of what the errors of its readings do.
void complete_reductions(const Plan& plan, Functions& functions, std::vector<Waiting> waiting, PointOutcome& outcome);

/// For a point that was read back from tables: fills what no table lists from what they do, at one
/// instant each. False if that cannot be done, because it needs the state or levels.
bool complete_unlisted(const Plan& plan, Functions& functions, PointOutcome& outcome);

}  // namespace tarn::runtime
