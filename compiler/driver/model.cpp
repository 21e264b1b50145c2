#include "compiler/driver/model.h"

#include <algorithm>
#include <cstdio>

#include "compiler/driver/landed.h"
#include "compiler/driver/messages.h"
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

bool is_too_large(const Diagnostic& diagnostic) { 
  return diagnostic.kind == diag::too_many_qubits.name || diagnostic.kind == diag::too_many_for_equation.name;
}

bool only_too_large(const Diagnostics& diagnostics) {
  return diagnostics.dropped() == 0 &&
         std::all_of(diagnostics.all().begin(), diagnostics.all().end(), [](const Diagnostic& each) {
           return each.severity != Severity::error || is_too_large(each);
         });
}

/// Without those about experiments that do not fit the memory.
Diagnostics of_the_text(const Diagnostics& diagnostics) {
  Diagnostics rest;
  for (const Diagnostic& each : diagnostics.all()) {
    if (!is_too_large(each)) rest.add(each);
  }
  return rest;
}

/// All that was said, the same once.
void add_all(const Diagnostics& from, Diagnostics& to) {
  for (const Diagnostic& each : from.all()) to.add(each);
}

}  // namespace

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
  if (only_too_large(diagnostics)) {
    diagnostics = of_the_text(diagnostics);
    model.program.told = diagnostics;
  }
  if (!diagnostics.has_errors()) {
    model.overrides = read_overrides(model.program, as_pairs(options.overrides), diagnostics);
  }
  show_diagnostics(diagnostics, model.program.sources(), options.json_diagnostics);
  if (diagnostics.has_errors()) return std::nullopt;
  return model;
}

std::optional<ChosenExperiments> choose_experiments(const LoadedModel& model, const ModelOptions& options,
                                                    const std::string& name) {
  Diagnostics diagnostics, too_large;
  ChosenExperiments chosen;
  std::vector<Instance> all;
  const auto& experiments = model.program.experiments;
  const auto only = name.empty() ? std::nullopt : find_experiment(model.program, name, diagnostics);
  for (std::uint32_t row = 0; row < experiments.size(); ++row) {
    if (!name.empty() && row != only) continue;
    Diagnostics own;
    ChosenExperiment experiment{experiments[row].name, instances(model.program, row, model.overrides, own)};
    refuse_not_landed(experiment.instances, own);
    if (own.has_errors() && only_too_large(own)) {
      add_all(own, too_large);
      chosen.complete = false;
      continue;
    }
    add_all(own, diagnostics);
    all.insert(all.end(), experiment.instances.begin(), experiment.instances.end());
    chosen.fitting.push_back(std::move(experiment));
  }
  if (!diagnostics.has_errors() && chosen.complete) {
    check_overrides_used(model.program, all, model.overrides, diagnostics);
  }
  add_all(too_large, diagnostics);
  show_diagnostics(diagnostics, model.program.sources(), options.json_diagnostics);
  if (diagnostics.error_count() > too_large.error_count()) return std::nullopt;
  return chosen;
}

}  // namespace tarn::compiler
