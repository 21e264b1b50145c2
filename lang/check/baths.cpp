#include "lang/check/arguments.h"
#include "lang/check/elements.h"
#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/check/samples.h"

namespace tarn {
namespace {

struct BathNodes {
  std::optional<NodeId> density, temperature;
  std::optional<Span> first_density, first_temperature;  ///< Where they are set.
  bool refused = false;
};

void refuse_bath_entry(Session& session, Span span, std::string_view word, BathNodes& nodes) {
  session.report(span, diag::not_available, fmt::format("`{}` of a bath", word), "`density` and `temperature`");
  nodes.refused = true;
}

std::string_view word_of_setting(ast::BathSetting setting) {
  switch (setting) {
    case ast::BathSetting::density: return "density";
    case ast::BathSetting::psd: return "psd";
    case ast::BathSetting::temperature: return "temperature";
    case ast::BathSetting::width: return "width";
    case ast::BathSetting::shift: return "shift";
  }
  return {};
}

void elaborate_density(Session& session, const Scope& scope, const ast::BathValue& setting, BathNodes& nodes) {
  const NodeId w = session.graph.add({.op = NodeOp::w, .dimension = kFrequency});
  Site site{.where = "in a bath"};
  site.operators = false;
  site.formula = true;
  site.spectrum_argument = w;
  site.table_argument = w;
  site.table_holds = false;
  const Scope inner{&scope, scope.module, &site, {}};
  nodes.density = evaluate_quantity(session, inner, setting.value, kFrequency);
  if (nodes.density) report_bad_density(session, *nodes.density, span_of(session, inner, setting.value));
}

void elaborate_temperature(Session& session, const Scope& scope, const ast::BathValue& setting, BathNodes& nodes) {
  nodes.temperature = evaluate_quantity(session, scope, setting.value, kTemperature);
  if (!nodes.temperature) return;
  const auto value = value_at_defaults(session, *nodes.temperature);
  if (value && !(*value >= 0)) {
    session.report(span_of(session, scope, setting.value), diag::below_zero, "a temperature",
                   in_unit(*value, written_unit(session.ast(scope), setting.value, kTemperature)));
  }
}

void elaborate_setting(Session& session, const Scope& scope, const ast::BathValue& setting, BathNodes& nodes) {
  const bool density = setting.setting == ast::BathSetting::density;
  if (!density && setting.setting != ast::BathSetting::temperature) {
    return refuse_bath_entry(session, setting.word, word_of_setting(setting.setting), nodes);
  }
  std::optional<Span>& first = density ? nodes.first_density : nodes.first_temperature;
  if (first) {
    session.report(setting.word, diag::statement_twice, std::string(word_of_setting(setting.setting))).note(*first, "first here");
  } else {
    first = setting.word;
  }
  density ? elaborate_density(session, scope, setting, nodes) : elaborate_temperature(session, scope, setting, nodes);
}

BathNodes elaborate_bath_entries(Session& session, Scope& scope, const ast::Bath& bath) {
  BathNodes nodes;
  Site site{.where = "in a bath"};
  site.operators = false;
  scope.site = &site;
  for (const ast::BathEntry& entry : bath.entries) {
    if (const auto* let = std::get_if<ast::Let>(&entry)) declare_let(session, scope, *let);
  }
  for (const ast::BathEntry& entry : bath.entries) {
    if (const auto* let = std::get_if<ast::Let>(&entry)) look_up(session, scope, let->name);
    if (const auto* setting = std::get_if<ast::BathValue>(&entry)) elaborate_setting(session, scope, *setting, nodes);
    if (const auto* band = std::get_if<ast::BathBand>(&entry)) refuse_bath_entry(session, band->span, "band", nodes);
  }
  scope.site = nullptr;
  if (!nodes.refused && !nodes.first_density) session.report(bath.name.span, diag::bath_incomplete, bath.name.text, "density");
  if (!nodes.refused && !nodes.first_temperature) session.report(bath.name.span, diag::bath_incomplete, bath.name.text, "temperature");
  return nodes;
}

}  // namespace

std::optional<std::uint32_t> elaborate_bath(Session& session, const Callable& callable, Unrolled& unrolled, Span span) {
  const auto& bath = std::get<ast::Bath>(*callable.item);
  Scope scope{nullptr, callable.module, nullptr, {}};
  if (!complete_arguments(session, callable, scope, span)) return std::nullopt;
  const FrameGuard frame(session, span, fmt::format("`{}` is used here", bath.name.text));
  const BathNodes nodes = elaborate_bath_entries(session, scope, bath);
  if (!nodes.density || !nodes.temperature) return std::nullopt;
  const InstanceBath made{bath.name.text, *nodes.density, *nodes.temperature, bath.name.span};
  for (std::uint32_t row = 0; row < unrolled.baths.size(); ++row) {
    const InstanceBath& known = unrolled.baths[row];
    if (known.span == made.span && known.density == made.density && known.temperature == made.temperature) return row;
  }
  unrolled.baths.push_back(made);
  return static_cast<std::uint32_t>(unrolled.baths.size() - 1);
}

void check_bath(Session& session, const Callable& callable) {
  Scope scope{nullptr, callable.module, nullptr, {}};
  declare_opaque(session, callable, scope);
  elaborate_bath_entries(session, scope, std::get<ast::Bath>(*callable.item));
}

}  // namespace tarn
