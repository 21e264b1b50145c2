#include "lang/check/check.h"
#include "tests/golden/runner.h"

namespace tarn::golden {
namespace {

/// What `tarn check` does: the text, then the settings, then the experiments with them.
SourceSet check_all(Modules modules, const Options& options, Diagnostics& diagnostics) {
  Program program = check(std::move(modules), diagnostics);
  const auto overrides = diagnostics.has_errors() ? Overrides{} : read_overrides(program, options.settings, diagnostics);
  if (diagnostics.has_errors()) return program.sources();
  const auto only = options.experiment.empty() ? std::nullopt : find_experiment(program, options.experiment, diagnostics);
  std::vector<Instance> all;
  for (std::uint32_t row = 0; row < program.experiments.size(); ++row) {
    if (!options.experiment.empty() && row != only) continue;
    for (Instance& instance : instances(program, row, overrides, diagnostics)) all.push_back(std::move(instance));
  }
  if (!diagnostics.has_errors()) check_overrides_used(program, all, overrides, diagnostics);
  return program.sources();
}

}  // namespace

const std::vector<Stage>& stages() {
  static const std::vector<Stage> all{
      {"parse", [](Modules modules, const Options&, Diagnostics&) { return std::move(modules.sources); }},
      {"check", check_all},
  };
  return all;
}

}  // namespace tarn::golden
