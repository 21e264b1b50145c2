#include "lang/check/laws.h"

#include <algorithm>
#include <cmath>

#include "lang/check/arguments.h"
#include "lang/check/expression.h"
#include "lang/check/samples.h"

namespace tarn {
namespace {

/// Laws being called, innermost last: a law that is there already calls itself.
bool enter(Session& session, const Callable& callable, Span span) {
  const auto& active = session.active;
  if (std::find(active.begin(), active.end(), callable.item) != active.end()) {
    session.report(span, diag::cyclic_definition, callable_name(callable)).note(declaration_span(callable), "declared here");
    return false;
  }
  session.active.push_back(callable.item);
  return true;
}

std::string_view place_name(CallableKind kind) {
  if (kind == CallableKind::schedule) return "in a schedule";
  if (kind == CallableKind::spectrum) return "in a spectrum";
  return kind == CallableKind::psd ? "in a psd" : "in a function";
}

/// `argument` is what tables in it are read at: the law's s or w.
Site law_site(const Callable& callable, std::optional<NodeId> argument) {
  Site site{.where = place_name(callable.kind)};
  site.operators = false;
  site.formula = callable.kind != CallableKind::schedule;
  site.table_holds = callable.kind == CallableKind::schedule || callable.kind == CallableKind::function;
  site.table_argument = argument;
  return site;
}

Value evaluate_body(Session& session, const Callable& callable, std::optional<NodeId> argument, Scope& scope) {
  const auto& law = std::get<ast::Law>(*callable.item);
  const Site site = law_site(callable, argument);
  scope.site = &site;
  Value value = evaluate(session, scope, law.value);
  scope.site = nullptr;
  if (value.unknown()) return {};
  const Span span = span_of(session, scope, law.value);
  const bool must_be_number = callable.kind != CallableKind::function || law.result.has_value();
  if (value.get<OperatorValue>()) {
    session.report(span, diag::operator_not_here, excerpt(session, span), std::string(site.where));
    return {};
  }
  if (!must_be_number) return value;
  const auto node = to_number(session, value, span);
  if (!node) return {};
  if (law.result) {
    const auto type = declared_type(session, *law.result);
    if (type && type->kind == DeclaredType::Kind::quantity && !require_dimension(session, *node, type->dimension, span)) return {};
  }
  return value.get<CountValue>() ? value : number_value(*node);
}

std::optional<Dimension> first_dimension(CallableKind kind) {
  if (kind == CallableKind::schedule) return kNumber;
  if (kind == CallableKind::function) return std::nullopt;
  return kFrequency;
}

void bind_first(Callable& callable, NodeId node, Span span) {
  const auto& args = arguments_of(callable);
  if (args.empty()) return;
  callable.bound.insert_or_assign(args.front().name.text, BoundValue{std::make_shared<const Value>(number_value(node)), span});
}

/// s w or f come first.
bool has_first_argument(const Callable& callable) {
  const std::string_view wanted = first_argument(callable.kind);
  const auto& args = arguments_of(callable);
  return wanted.empty() || (!args.empty() && args.front().name.text == wanted);
}

bool check_first_argument(Session& session, const Callable& callable) {
  const std::string_view wanted = first_argument(callable.kind);
  const auto& args = arguments_of(callable);
  if (has_first_argument(callable)) return true;
  const Span span = args.empty() ? declaration_span(callable) : args.front().name.span;
  auto tail = session.report(span, diag::first_argument, describe(callable.kind), std::string(wanted));
  if (callable.kind == CallableKind::schedule) tail.remedy("`s` is the place along the anneal, 0 to 1; times stand in `pace`");
  return false;
}

/// On [0, 1], with parameters at their defaults, where every other argument has a default.
void check_finite(Session& session, const Callable& callable) {
  const auto& args = arguments_of(callable);
  if (!std::all_of(args.begin() + 1, args.end(), [](const ast::Arg& arg) { return arg.value.has_value(); })) return;
  Callable at_s = callable;
  bind_first(at_s, session.graph.add({.op = NodeOp::s}), declaration_span(callable));
  const Value value = call_law(session, at_s, declaration_span(callable));
  if (const auto* number = value.get<NumberValue>()) report_not_finite_in_s(session, {number->node});
}

}  // namespace

std::string_view first_argument(CallableKind kind) {
  if (kind == CallableKind::schedule) return "s";
  if (kind == CallableKind::spectrum) return "w";
  return kind == CallableKind::psd ? "f" : "";
}

Value call_law(Session& session, const Callable& callable, Span span) {
  if (!has_first_argument(callable) || !enter(session, callable, span)) return {};
  Scope scope{nullptr, callable.module, nullptr, {}};
  bool complete = complete_arguments(session, callable, scope, span);
  const auto expected = first_dimension(callable.kind);
  const auto& args = arguments_of(callable);
  std::optional<NodeId> argument;
  if (complete && expected && !args.empty()) {
    const auto& first = scope.names.find(args.front().name.text)->second.value;
    argument = to_number(session, *first, span);
    complete = argument && require_dimension(session, *argument, *expected, callable.bound.at(args.front().name.text).span);
  }
  Value value;
  if (complete) {
    const FrameGuard frame(session, span, fmt::format("`{}` is used here", callable_name(callable)));
    value = evaluate_body(session, callable, argument, scope);
  }
  session.active.pop_back();
  return value;
}

Value spectrum_at(Session& session, const Callable& callable, NodeId w, Span span) {
  Callable bound = callable;
  bind_first(bound, w, span);
  return call_law(session, bound, span);
}

std::optional<NodeId> check_law(Session& session, const Callable& callable) {
  if (!check_first_argument(session, callable)) return std::nullopt;
  if (!enter(session, callable, declaration_span(callable))) return std::nullopt;
  Scope scope{nullptr, callable.module, nullptr, {}};
  declare_opaque(session, callable, scope);
  const auto& args = arguments_of(callable);
  std::optional<NodeId> argument;
  if (const auto expected = first_dimension(callable.kind)) {
    const NodeOp op = callable.kind == CallableKind::schedule ? NodeOp::s : NodeOp::w;
    argument = session.graph.add({.op = op, .dimension = *expected, .span = args.front().name.span});
    scope.names.insert_or_assign(args.front().name.text, Binding{number_value(*argument), nullptr, false, args.front().name.span});
  }
  const Value value = evaluate_body(session, callable, argument, scope);
  session.active.pop_back();
  if (callable.kind == CallableKind::schedule && !value.unknown()) check_finite(session, callable);
  if (const auto* number = value.get<NumberValue>()) return number->node;
  if (value.get<CountValue>()) return to_number(session, value, declaration_span(callable));
  return std::nullopt;
}

}  // namespace tarn
