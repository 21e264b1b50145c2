#pragma once
/// \file Whether the equation of a grid point may be believed at instants of its run.

#include <span>
#include <vector>

#include "runtime/experiment/point.h"
#include "runtime/validity/validity.h"

namespace tarn::runtime {

/// One judgement an instant. `generator` gives T1 and T2 of the equation itself. Errors: those of making
/// noise operators and baths, `interrupted`.
Result<std::vector<ValidityJudgement>, RunError> judge_point(PointTask& task, const GeneratorAt& generator,
                                                             std::span<const Instant> instants);

}  // namespace tarn::runtime
