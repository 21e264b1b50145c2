#pragma once
/// \file The short report of a run for the terminal.

#include <string>

#include "runtime/experiment/run.h"

namespace tarn::runtime {

/// A table of the swept parameters and the answers, numbers with as many digits as their errors
/// allow (8 at most), at most about `most_rows` >= 3 rows with the middle left out; then the
/// claims and how many points are there, marked and failed: why, notices.h says. Plain text, lines
/// end with LF.
std::string summary(const RunReport& report, std::size_t most_rows = 20);

/// A claim with what it came to and where it is closest to its limit.
std::string claim_text(const ClaimReport& claim, const Plan& plan);

/// `value` with digits down to a tenth of `error`, 8 significant ones at most.
std::string digits_allowed(double value, double error);

}  // namespace tarn::runtime
