#pragma once
/// \file The commands of the program. Each returns its exit status; results go to standard output,
/// everything else to standard error.

#include "compiler/driver/options.h"

namespace tarn::compiler {

/// Exit statuses, the worst of a run: see README.md.
enum ExitStatus { kFine = 0, kClaimFailed = 1, kWrongInput = 2, kIncomplete = 3 };

int check_model(const CheckCommand& command);
int explain_model(const ExplainCommand& command);
int run_model(const RunCommand& command);
int tidy_model(const TidyCommand& command);
int emit_stage(const EmitCommand& command);

}  // namespace tarn::compiler
