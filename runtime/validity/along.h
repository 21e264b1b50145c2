#pragma once
/// \file What the judgements along a run say together, and their rows for validity.csv.

#include <span>
#include <string>
#include <vector>

#include "runtime/validity/validity.h"

namespace tarn::runtime {

/// Between two places that were judged, the verdict became another.
struct ValidityChange {
  std::size_t row = 0;  ///< The later of the two.
  double s = 0, t = 0;  ///< Of that.
  Validity before = Validity::within, after = Validity::within;
  std::string reason;   ///< One sentence: what it became, where, and by which condition.
};

struct RunValidity {
  Validity validity = Validity::within;  ///< The worst over s and conditions.
  std::size_t worst = 0;                 ///< Its row.
  std::string reason;                    ///< One sentence, as above; empty for an equation without conditions.
  std::vector<ValidityChange> changes;   ///< In the order of the run.
};

/// Precondition: `run` is not empty.
RunValidity run_validity(std::span<const ValidityJudgement> run);

/// A column of validity.csv; unit empty for plain numbers.
struct ValidityColumn {
  std::string name, unit;
};

/// The columns of numbers for one equation: s, t, times, spacing, scales, the ratio of each condition. The verdict comes after them.
std::vector<ValidityColumn> validity_columns(Equation equation);

/// A row of as many numbers, in the units of the columns; NaN where there is none: no mode, or a condition
/// that this variant of the equation has not.
std::vector<double> validity_numbers(const ValidityJudgement& judgement, Equation equation);

}  // namespace tarn::runtime
