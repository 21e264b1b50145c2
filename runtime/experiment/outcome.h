#pragma once
/// \file What a grid point yields: answers with their errors, or why there are none.

#include <cstdint>
#include <limits>
#include <optional>
#include <string>
#include <vector>

#include "runtime/equation/propagate.h"
#include "runtime/experiment/pace.h"
#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// A number in internal units and the estimate of its numerical error (1 sigma, for the whole run).
struct Answer {
  double value = std::numeric_limits<double>::quiet_NaN();
  double error = std::numeric_limits<double>::quiet_NaN();
};

/// An answer and the moment it belongs to.
struct Sample {
  Instant at;
  Answer answer;
};

/// Which of the equations compared a plan runs; 0 where there is one only.
std::uint32_t choice_of(const Plan& plan);
/// Points of the grid, each with the equations compared one after the other.
std::uint64_t row_of(const Plan& plan, std::uint64_t index, std::uint32_t choice);

/// How often an observable has a value: once a grid point, at each instant of its trace, or at each
/// s of the scan.
enum class Occurrence : std::uint8_t { once, trace, scan };
Occurrence occurrence_of(const Plan& plan, const Observable& observable);

/// True if the observable reads lowest(), highest() or final() of another.
bool reads_reduction(const Plan& plan, const Observable& observable);

/// True of an observable `at t` or `at s`, whose moment may never come.
bool names_moment(const Observable& observable);

/// True if a series holds no value: no moment, or no number.
bool lacks_value(const std::vector<Sample>& series);

/// The status of a point that went well, of one whose error stayed above the tolerance, of one where an
/// observable is no finite number, and of one where the moment of an observable never comes. None holds
/// `: `, which stands in the status of a failed point.
inline constexpr const char* kStatusOk = "ok";
inline constexpr const char* kStatusLoose = "tolerance not reached";
inline constexpr const char* kStatusNotFinite = "answer not finite";
inline constexpr const char* kStatusNotMet = "moment never met";

struct PointOutcome {
  std::uint64_t index = 0;                   ///< In the grid, first axis slowest.
  std::uint64_t row = 0;                     ///< Among all points of all equations compared: see row_of().
  std::string status = kStatusOk;            ///< Or another of the above, or `KIND: message` of a failed point.
  std::optional<RunError> error;             ///< Set if the point failed; then there are no answers.
  std::vector<std::vector<Sample>> series;   ///< For each observable of the plan.
  std::vector<Answer> distribution;          ///< Of every bit string, if asked.
  std::vector<std::string> remarks;          ///< To be shown with the run, once each.
  double leakage = 0;                        ///< Population that left the levels kept, an upper estimate.
  Counters counters;
};

}  // namespace tarn::runtime
