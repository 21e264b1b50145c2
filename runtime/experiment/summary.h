#pragma once
/// \file The short report of a run for the terminal.

#include <string>

#include "runtime/experiment/run.h"

namespace tarn::runtime {

/// A table of the swept parameters and the answers, numbers with as many digits as their errors
/// allow (8 at most), at most about `most_rows` >= 3 rows with the middle left out; then the
/// claims, what was left out, remarks, marked and failed points. Plain text, lines end with LF.
std::string summary(const RunReport& report, std::size_t most_rows = 20);

/// `value` with digits down to a tenth of `error`, 8 significant ones at most.
std::string digits_allowed(double value, double error);

}  // namespace tarn::runtime
