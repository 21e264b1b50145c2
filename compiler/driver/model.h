#pragma once
/// \file From a file on the command line to checked instances, with every message shown.

#include <optional>
#include <string>
#include <vector>

#include "compiler/driver/options.h"
#include "lang/check/check.h"

namespace tarn::compiler {

/// A model that was read and checked. Copies share the texts.
struct LoadedModel {
  Program program;
  Overrides overrides;
};

/// Reads and checks the model; shows its messages on standard error. Nothing if it has errors, but for
/// experiments that do not fit the memory: those are choose_experiments()'s business.
std::optional<LoadedModel> load_model(const ModelOptions& options);

/// One experiment chosen to be shown or run.
struct ChosenExperiment {
  std::string name;
  std::vector<Instance> instances;  ///< In grid order; more than one where a count is swept.
};

struct ChosenExperiments {
  std::vector<ChosenExperiment> fitting;
  bool complete = true;  ///< False: some experiment does not fit the memory, as was said.
};

/// The experiment with this name, or all of the main file; messages on standard error, nothing
/// after errors. Overrides that change nothing in any of the chosen experiments are errors.
std::optional<ChosenExperiments> choose_experiments(const LoadedModel& model, const ModelOptions& options,
                                                    const std::string& name);

/// On standard error, as text or as JSON lines.
void show_diagnostics(const Diagnostics& diagnostics, const SourceSet& sources, bool json);

}  // namespace tarn::compiler
