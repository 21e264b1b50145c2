#pragma once
/// \file What a run has to say beside its results: failures, marks, what was left out, remarks.

#include <string>
#include <vector>

#include "runtime/experiment/run.h"

namespace tarn::runtime {

enum class Gravity : std::uint8_t { error, warning, remark };

/// Kinds stand in lang/ERRORS.md: those of RunError and FolderError, and `claim_fails`,
/// `claim_undecided`, `tolerance_not_reached`, `answer_not_finite`, `moment_never_met`, `interrupted`,
/// `out_of_time`, `left_out`, `population_left`, `run_remark`.
struct Notice {
  std::string kind;
  std::string text;
  std::string remedy;
  Gravity gravity = Gravity::remark;
  Place place = {};  ///< An empty file: nowhere.
};

/// Failures of points once each with how many points they befell, then marks, the ending, what was
/// left out, remarks.
std::vector<Notice> notices_of(const RunReport& report);

/// Claims that do not hold; the summary shows them too.
std::vector<Notice> failed_claims(const RunReport& report);

}  // namespace tarn::runtime
