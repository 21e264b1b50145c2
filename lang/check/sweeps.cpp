#include <cmath>
#include <utility>

#include "lang/check/arguments.h"
#include "lang/check/experiment.h"
#include "lang/check/expression.h"
#include "lang/check/remedies.h"

namespace tarn {
namespace {

/// Row of the parameter that a path names: ta, base.sp.
std::optional<std::uint32_t> parameter_row(Session& session, const Scope& scope, const ast::Path& path) {
  std::uint32_t module = scope.module;
  std::size_t step = 0;
  while (step + 1 < path.steps.size()) {
    const auto next = find_module(session, module, path.steps[step].name.text);
    if (!next) break;
    module = *next;
    ++step;
  }
  const ast::Name& name = path.steps[step].name;
  const bool plain = step + 1 == path.steps.size() && !path.call && !path.steps[step].index;
  std::vector<std::string> known;
  const auto& rows = session.program.parameter_rows;
  const auto found = rows.find({module, name.text});
  if (plain && found != rows.end()) return found->second;
  for (const auto& [key, row] : rows) {
    if (key.first == module) known.push_back(key.second);
  }
  session.report(path.span, diag::unknown_parameter, excerpt(session, path.span)).remedy(offer(name.text, known, "only parameters are swept:"));
  return std::nullopt;
}

std::vector<double> spaced(double low, double high, std::int64_t count, bool logarithmic) {
  std::vector<double> values;
  for (std::int64_t k = 0; k < count; ++k) {
    const double part = count == 1 ? 0 : static_cast<double>(k) / static_cast<double>(count - 1);
    const double value = logarithmic ? low * std::pow(high / low, part) : low + (high - low) * part;
    values.push_back(k + 1 == count && count > 1 ? high : value);
  }
  return values;
}

std::vector<double> list_values(Session& session, const Value& value, Dimension dimension, Span span) {
  const auto* list = value.get<ListValue>();
  if (list == nullptr) {
    if (!value.unknown()) session.report(span, diag::axis_form, excerpt(session, span));
    return {};
  }
  if (list->items->empty()) session.report(span, diag::axis_count, std::int64_t{0});
  std::vector<double> values;
  for (const Value& item : *list->items) {
    const auto node = to_number(session, item, span);
    if (!node || !require_dimension(session, *node, dimension, span)) return {};
    if (session.graph[*node].op != NodeOp::constant) {
      session.report(span, diag::constant_needed, excerpt(session, span));
      return {};
    }
    values.push_back(session.graph[*node].number);
  }
  return values;
}

/// linear(a, b, n), log(a, b, n), list(...), column(...).
std::vector<double> axis_values(Session& session, const Scope& scope, ast::ExprId id, Dimension dimension) {
  const Span span = span_of(session, scope, id);
  const auto* use = std::get_if<ast::Use>(&session.ast(scope).expr(id).node);
  const std::string word = use == nullptr || use->path.steps.size() != 1 ? "" : use->path.steps.front().name.text;
  const bool spacing = use != nullptr && use->path.call && (word == "linear" || word == "log");
  if (!spacing) return list_values(session, evaluate(session, scope, id), dimension, span);
  const auto& given = use->path.given;
  if (given.size() != 3) {
    session.report(span, diag::argument_count, word, "3 arguments", given.size());
    return {};
  }
  const auto low = evaluate_constant(session, scope, given[0].value, dimension);
  const auto high = evaluate_constant(session, scope, given[1].value, dimension);
  const auto count = evaluate_count(session, scope, given[2].value);
  if (!low || !high || !count) return {};
  if (*count < 1 || *count > 1'000'000) {
    session.report(given[2].span, diag::axis_count, *count);
    return {};
  }
  if (word == "log" && !(*low > 0 && *high > 0)) {
    session.report(cover(given[0].span, given[1].span), diag::not_positive, "both ends of `log`",
                   format_quantity(*low > 0 ? *high : *low, dimension))
        .remedy("`log` goes from above zero; `linear` may start at zero");
    return {};
  }
  return spaced(*low, *high, *count, word == "log");
}

void check_values(Session& session, const ProgramParameter& parameter, const std::vector<double>& values, Span span) {
  for (const double value : values) {
    const bool below = parameter.lowest && *parameter.lowest - value > 1e-12 * std::abs(*parameter.lowest);
    const bool above = parameter.highest && value - *parameter.highest > 1e-12 * std::abs(*parameter.highest);
    if (below || above) {
      session.report(span, diag::out_of_range, parameter.name, in_unit(value, parameter.unit),
                     in_unit(parameter.lowest.value_or(-INFINITY), parameter.lowest_unit),
                     in_unit(parameter.highest.value_or(INFINITY), parameter.highest_unit))
          .note(parameter.span, "declared here");
      return;
    }
    if (parameter.count && value != std::floor(value)) {
      session.report(span, diag::count_needed, format_quantity(value, kNumber))
          .remedy(fmt::format("if `{}` may be any number, declare it as `{} : number`", parameter.name, parameter.declared))
          .note(parameter.span, "declared here");
      return;
    }
  }
}

void check_axis(Session& session, const SweptAxis& axis, const ast::Sweep& sweep) {
  for (const SweptColumn& column : axis) {
    if (column.values.size() == axis.front().values.size()) continue;
    session.report(sweep.span, diag::sweep_lengths, axis.front().values.size(), column.values.size());
    return;
  }
}

}  // namespace

std::vector<SweptAxis> elaborate_sweeps(Session& session, const Scope& scope, const Statements& statements) {
  std::vector<SweptAxis> axes;
  std::map<std::uint32_t, Span> swept;
  for (const ast::Sweep* sweep : statements.sweeps) {
    SweptAxis together;
    for (const ast::SweepAxis& axis : sweep->axes) {
      const auto row = parameter_row(session, scope, axis.parameter);
      if (!row) continue;
      const ProgramParameter& parameter = session.program.parameters[*row];
      const auto [before, is_new] = swept.try_emplace(*row, axis.parameter.span);
      if (!is_new) session.report(axis.parameter.span, diag::swept_twice, parameter.name).note(before->second, "first swept here");
      const auto values = axis_values(session, scope, axis.values, parameter.dimension);
      check_values(session, parameter, values, span_of(session, scope, axis.values));
      if (!is_new || values.empty()) continue;
      together.push_back({*row, values, axis.parameter.span});
      if (!sweep->together) axes.push_back(std::exchange(together, {}));
    }
    if (together.empty()) continue;
    check_axis(session, together, *sweep);
    axes.push_back(std::move(together));
  }
  return axes;
}

std::vector<double> elaborate_scan(Session& session, const Scope& scope, const ast::Scan& scan) {
  if (scan.variable.text != "s") {
    session.report(scan.variable.span, diag::scan_variable, scan.variable.text).remedy("`scan s over linear(0, 1, 101)`");
    return {};
  }
  const auto values = axis_values(session, scope, scan.values, kNumber);
  for (const double s : values) {
    if (s >= 0 && s <= 1) continue;
    session.report(span_of(session, scope, scan.values), diag::pace_outside, s);
    break;
  }
  return values;
}

}  // namespace tarn
