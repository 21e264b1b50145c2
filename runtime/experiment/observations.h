#pragma once
/// \file When a grid point is looked at, and for which observables.

#include <cstdint>
#include <span>
#include <vector>

#include "lang/support/result.h"
#include "runtime/experiment/pace.h"
#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// One instant and what is wanted there.
struct Observation {
  Instant at;
  std::vector<std::uint32_t> observables;
  bool distribution = false;
};

/// All observations of a point, ascending in t; each (t, s) once. Observables of parameters only are
/// looked at once at the end; those of a scan at every s with t = 0. A moment that never comes (`at t`
/// beyond the pace, `at s` that the pace never has) is left out, so that its observable has no value.
/// Error, with the observable's place: `not_finite`.
Result<std::vector<Observation>, RunError> observations_of(const Plan& plan, const Timeline& timeline,
                                                           std::span<const double> settings);

/// Readings that the observables of an observation use, each once, ascending.
std::vector<std::uint32_t> readings_at(const Plan& plan, const Observation& observation);

}  // namespace tarn::runtime
