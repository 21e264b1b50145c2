#pragma once
/// \file Whether the equation of a grid point may be believed at instants of its run.

#include "runtime/experiment/point.h"

namespace tarn::runtime {

/// At even instants of the run; equations without conditions are within. `generator` gives T1 and T2 of the
/// equation itself. Errors: those of making noise operators and baths. The reason names no t, so that runs of several
/// lengths say it once.
Result<PointVerdict, RunError> judge_run(PointTask& task, const GeneratorAt& generator);

/// At one instant, of what stands still.
Result<PointVerdict, RunError> judge_instant(PointTask& task, const GeneratorAt& generator, Instant at);

}  // namespace tarn::runtime
