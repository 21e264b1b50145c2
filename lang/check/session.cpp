#include "lang/check/session.h"

#include <algorithm>
#include <cmath>

#include "lang/check/expression.h"

namespace tarn {

bool Session::step(Span span) {
  if (exhausted) return false;
  ++steps;
  if (steps <= kMaxSteps && graph.nodes.size() <= kMaxNodes) return true;
  exhausted = true;
  report(span, diag::too_much_work).remedy("fewer placements, shorter loops or fewer nested calls");
  return false;
}

void Session::resume(std::uint64_t done) {
  steps = done;
  exhausted = done > kMaxSteps;
}

void Session::remark(const std::string& text) {
  if (std::find(remarks.begin(), remarks.end(), text) == remarks.end()) remarks.push_back(text);
}

std::string excerpt(const Session& session, Span span) {
  constexpr std::size_t kMost = 40;
  std::string result;
  for (const char c : session.text(span)) {
    const bool blank = c == ' ' || c == '\n' || c == '\t' || c == '\r';
    if (blank && !result.empty() && result.back() == ' ') continue;
    result += blank ? ' ' : c;
  }
  if (result.size() <= kMost) return result;
  std::size_t end = kMost;
  while (end > 0 && (static_cast<unsigned char>(result[end]) & 0xC0) == 0x80) --end;
  return result.substr(0, end) + " ...";
}

NodeId opaque_number(Session& session, const std::string& name, Dimension dimension, Span span) {
  const auto index = kOpaque + static_cast<std::uint32_t>(session.opaque.size());
  session.opaque.push_back(name);
  return session.graph.add({.op = NodeOp::parameter, .index = index, .dimension = dimension, .span = span});
}

Value parameter_value(Session& session, std::uint32_t row, Span span) {
  const ProgramParameter& parameter = session.program.parameters[row];
  const auto set = session.overrides.find(parameter.name);
  std::optional<double> value = set == session.overrides.end() ? parameter.value : std::optional(set->second);
  if (session.constants_only) {
    session.report(span, diag::constant_needed, parameter.declared).remedy("`let` names what follows from parameters");
    return {};
  }
  if (parameter.broken) return {};
  if (parameter.count) {
    session.counts_used.insert(parameter.name);
    if (!value && session.trial) value = parameter.lowest.value_or(2);
    if (!value && !session.generic) {
      session.report(span, diag::no_value, parameter.name).note(parameter.span, "declared here");
      return {};
    }
    if (session.generic) return {CountValue{std::nullopt, opaque_number(session, parameter.name, kNumber, span)}};
    return count_value(static_cast<std::int64_t>(*value));
  }
  const auto [found, is_new] =
      session.parameter_rows.try_emplace(row, static_cast<std::uint32_t>(session.parameters.size()));
  if (is_new) {
    session.parameters.push_back({parameter.name, parameter.dimension, parameter.unit, value.value_or(NAN), parameter.lowest,
                                  parameter.highest, parameter.span});
  }
  return number_value(session.graph.add(
      {.op = NodeOp::parameter, .index = found->second, .dimension = parameter.dimension, .span = span}));
}

std::string describe(CallableKind kind) {
  switch (kind) {
    case CallableKind::schedule: return "a schedule";
    case CallableKind::spectrum: return "a spectrum";
    case CallableKind::psd: return "a psd";
    case CallableKind::function: return "a function";
    case CallableKind::bath: return "a bath";
    case CallableKind::qubit: return "a qubit kind";
    case CallableKind::coupler: return "a coupler kind";
    case CallableKind::chip: return "a chip";
  }
  return {};
}

std::string describe(const Value& value) {
  if (const auto* callable = value.get<Callable>()) return describe(callable->kind);
  if (value.get<NumberValue>()) return "a number";
  if (value.get<TruthValue>()) return "a truth";
  if (value.get<CountValue>()) return "a count";
  if (value.get<VerdictValue>()) return "a verdict";
  if (value.get<TextValue>()) return "a text";
  if (value.get<OperatorValue>()) return "an operator";
  if (value.get<ListValue>()) return "a list";
  if (value.get<RowsValue>()) return "rows of a table";
  return "nothing known";
}

}  // namespace tarn
