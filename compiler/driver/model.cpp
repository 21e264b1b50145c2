#include "compiler/driver/model.h"

#include <unistd.h>

#include <cstdio>
#include <cstdlib>

#include "lang/diagnostics/render.h"
#include "lang/source/library.h"
#include "lang/source/loader.h"

namespace tarn::compiler {
namespace {

std::vector<std::pair<std::string, std::string>> as_pairs(const std::vector<Override>& overrides) {
  std::vector<std::pair<std::string, std::string>> pairs;
  for (const Override& override : overrides) pairs.emplace_back(override.name, override.value);
  return pairs;
}

}  // namespace

bool colour_wanted() {
  const char* no_colour = std::getenv("NO_COLOR");
  return isatty(STDERR_FILENO) != 0 && (no_colour == nullptr || *no_colour == '\0');
}

void show_diagnostics(const Diagnostics& diagnostics, const SourceSet& sources, bool json) {
  const std::string text =
      json ? render_json(diagnostics, sources) : render(diagnostics, sources, {.colour = colour_wanted()});
  std::fwrite(text.data(), 1, text.size(), stderr);
}

std::optional<LoadedModel> load_model(const ModelOptions& options) {
  Diagnostics diagnostics;
  LoadOptions load{standard_library(), {}};
  for (const std::string& folder : options.also_read) load.also_read.emplace_back(folder);
  Modules modules = load_modules(options.file, load, diagnostics);
  if (diagnostics.has_errors()) {
    // What a text that cannot be read means is a guess: its messages would only follow from others.
    show_diagnostics(diagnostics, modules.sources, options.json_diagnostics);
    return std::nullopt;
  }
  LoadedModel model{check(std::move(modules), diagnostics), {}};
  if (!diagnostics.has_errors()) {
    model.overrides = read_overrides(model.program, as_pairs(options.overrides), diagnostics);
  }
  show_diagnostics(diagnostics, model.program.sources(), options.json_diagnostics);
  if (diagnostics.has_errors()) return std::nullopt;
  return model;
}

std::optional<std::vector<ChosenExperiment>> choose_experiments(const LoadedModel& model, const ModelOptions& options,
                                                                const std::string& name) {
  Diagnostics diagnostics;
  std::vector<ChosenExperiment> chosen;
  std::vector<Instance> all;
  const auto& experiments = model.program.experiments;
  const auto only = name.empty() ? std::nullopt : find_experiment(model.program, name, diagnostics);
  for (std::uint32_t row = 0; row < experiments.size(); ++row) {
    if (!name.empty() && row != only) continue;
    chosen.push_back({experiments[row].name, instances(model.program, row, model.overrides, diagnostics)});
    all.insert(all.end(), chosen.back().instances.begin(), chosen.back().instances.end());
  }
  if (!diagnostics.has_errors()) check_overrides_used(model.program, all, model.overrides, diagnostics);
  show_diagnostics(diagnostics, model.program.sources(), options.json_diagnostics);
  if (diagnostics.has_errors()) return std::nullopt;
  return chosen;
}

}  // namespace tarn::compiler
