#include <algorithm>
#include <cmath>

#include "lang/check/arguments.h"
#include "lang/check/check.h"
#include "lang/check/experiment.h"
#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/syntax/parse.h"

namespace tarn {
namespace {

/// The option as it was typed, as a text of its own.
struct Setting {
  const SourceFile& file;
  Span name, value;
};

Setting show_setting(Program& program, const std::string& name, const std::string& text) {
  const SourceFile& file = program.loaded->sources.add("command line", fmt::format("--set {}={}", name, text));
  const auto from = static_cast<std::uint32_t>(std::string_view("--set ").size());
  const auto to = from + static_cast<std::uint32_t>(name.size());
  return {file, {file.id, from, to}, {file.id, to + 1, static_cast<std::uint32_t>(file.text.size())}};
}

/// The value of a setting as a module: read as `let v = TEXT`, with the same places as the option.
std::optional<std::uint32_t> add_setting(Program& program, const std::string& name, const std::string& text, Diagnostics& diagnostics) {
  const Setting setting = show_setting(program, name, text);
  program.settings[name] = {setting.file.id, setting.name.begin, setting.value.end};
  const std::size_t errors = diagnostics.error_count();
  SourceFile read = setting.file;
  read.text = "let v" + std::string(setting.value.begin - 6, ' ') + "=" + text;
  Module module;
  module.ast = parse(read, diagnostics);
  if (diagnostics.error_count() != errors) return std::nullopt;
  if (module.ast.items.size() != 1 || !std::holds_alternative<ast::Let>(module.ast.items.front())) {
    diagnostics.report(setting.value, diag::setting_form, name);
    return std::nullopt;
  }
  program.loaded->modules.push_back(std::move(module));
  program.modules.emplace_back();
  return static_cast<std::uint32_t>(program.modules.size() - 1);
}

const ProgramParameter* find_parameter(Program& program, const std::string& name, const std::string& text, Diagnostics& diagnostics) {
  std::vector<std::string> known;
  for (const ProgramParameter& parameter : program.parameters) {
    if (parameter.name == name) return &parameter;
    known.push_back(parameter.name);
  }
  diagnostics.report(show_setting(program, name, text).name, diag::unknown_parameter, name).remedy(offer(name, known, "parameters:"));
  return nullptr;
}

std::optional<double> read_setting(Program& program, const ProgramParameter& parameter, const std::string& text, Diagnostics& diagnostics) {
  const auto module = add_setting(program, parameter.name, text, diagnostics);
  if (!module) return std::nullopt;
  const Overrides none;
  Graph graph;
  Session session{program, graph, diagnostics, none};
  session.constants_only = true;
  const Scope scope{nullptr, *module, nullptr, {}};
  const ast::ExprId id = std::get<ast::Let>(program.ast(*module).items.front()).value;
  std::optional<double> value;
  if (parameter.count) {
    const auto count = evaluate_count(session, scope, id);
    if (count) value = static_cast<double>(*count);
  } else {
    value = evaluate_constant(session, scope, id, parameter.dimension);
  }
  const bool below = value && parameter.lowest && *value < *parameter.lowest;
  const bool above = value && parameter.highest && *value > *parameter.highest;
  if (!below && !above) return value;
  session.report(span_of(session, scope, id), diag::out_of_range, parameter.name,
                 in_unit(*value, written_unit(session.ast(scope), id, parameter.dimension)),
                 in_unit(parameter.lowest.value_or(-INFINITY), parameter.lowest_unit),
                 in_unit(parameter.highest.value_or(INFINITY), parameter.highest_unit))
      .note(parameter.span, "declared here");
  return std::nullopt;
}

}  // namespace

Overrides read_overrides(Program& program, const std::vector<std::pair<std::string, std::string>>& settings, Diagnostics& diagnostics) {
  Overrides result;
  for (const auto& [name, text] : settings) {
    const ProgramParameter* found = find_parameter(program, name, text, diagnostics);
    if (found == nullptr) continue;
    const ProgramParameter parameter = *found;
    const auto value = read_setting(program, parameter, text, diagnostics);
    if (value) result[name] = *value;
  }
  return result;
}

namespace {

const AxisColumnI* sweep_of(const Instance& instance, const std::string& parameter) {
  for (const AxisI& axis : instance.axes) {
    for (const AxisColumnI& column : axis.columns) {
      if (column.parameter == parameter) return &column;
    }
  }
  return nullptr;
}

/// True if another value would change something: a sweep would put its own values in its place.
bool is_used(const Instance& instance, const std::string& parameter) {
  if (sweep_of(instance, parameter) != nullptr) return false;
  if (std::find(instance.counts.begin(), instance.counts.end(), parameter) != instance.counts.end()) return true;
  const auto live = live_parameters(instance);
  return std::any_of(live.begin(), live.end(),
                     [&](std::uint32_t row) { return instance.parameters[row].name == parameter; });
}

}  // namespace

void check_overrides_used(const Program& program, const std::vector<Instance>& all, const Overrides& overrides, Diagnostics& diagnostics) {
  for (const auto& [name, value] : overrides) {
    const bool used = std::any_of(all.begin(), all.end(),
                                  [&, &parameter = name](const Instance& i) { return is_used(i, parameter); });
    const auto declared = std::find_if(program.parameters.begin(), program.parameters.end(),
                                       [&, &parameter = name](const ProgramParameter& p) { return p.name == parameter; });
    if (used || declared == program.parameters.end()) continue;
    const auto typed = program.settings.find(name);
    const Span place = typed == program.settings.end() ? declared->span : typed->second;
    const AxisColumnI* swept = nullptr;
    for (const Instance& instance : all) swept = swept == nullptr ? sweep_of(instance, name) : swept;
    if (swept == nullptr) {
      diagnostics.report(place, diag::changes_nothing, name).note(declared->span, "declared here");
      continue;
    }
    diagnostics.report(place, diag::set_and_swept, name)
        .remedy(fmt::format("take out `sweep {0}`, or leave `--set {0}` away", name))
        .note(swept->span, "swept here");
  }
}

}  // namespace tarn
