#include "lang/check/arguments.h"

#include <algorithm>
#include <array>

#include "lang/check/arithmetic.h"
#include "lang/check/expression.h"
#include "lang/check/path.h"
#include "lang/check/remedies.h"
#include "lang/support/near.h"

namespace tarn {
namespace {

const std::vector<ast::Arg> kNoArguments;

Value wrong_kind(Session& session, const ast::Arg& arg, const std::string& expected, const Value& value, Span span) {
  session.report(span, diag::wrong_kind, expected, describe(value))
      .note(arg.span, fmt::format("`{}` is declared here", arg.name.text));
  return {};
}

Value as_quantity(Session& session, const ast::Arg& arg, Dimension expected, const Value& value, Span span) {
  if (!value.get<NumberValue>() && !value.get<CountValue>()) {
    return wrong_kind(session, arg, describe(expected), value, span);
  }
  const auto node = to_number(session, value, span);
  if (!node) return {};
  const FrameGuard frame(session, arg.span, fmt::format("`{}` is declared here", arg.name.text));
  return require_dimension(session, *node, expected, span) ? number_value(*node) : Value{};
}

Value as_declared(Session& session, const ast::Arg& arg, const DeclaredType& type, const Value& value, Span span) {
  using Kind = DeclaredType::Kind;
  if (type.kind == Kind::quantity) return as_quantity(session, arg, type.dimension, value, span);
  if (type.kind == Kind::count) {
    const FrameGuard frame(session, arg.span, fmt::format("`{}` is declared here", arg.name.text));
    const auto count = to_count(session, value, span);
    return count ? Value{*count} : Value{};
  }
  if (type.kind == Kind::truth) return value.get<TruthValue>() ? value : wrong_kind(session, arg, "a truth", value, span);
  if (type.kind == Kind::text) return value.get<TextValue>() ? value : wrong_kind(session, arg, "a text", value, span);
  const auto* callable = value.get<Callable>();
  if (callable != nullptr && callable->kind == type.part) return value;
  return wrong_kind(session, arg, describe(type.part), value, span);
}

/// The value as the argument takes it. `standard` is the default's value, which gives the
/// dimension where no type is declared.
Value checked_argument(Session& session, const ast::Arg& arg, const std::optional<Value>& standard, const Value& value,
                       Span span) {
  if (value.unknown()) return {};
  if (arg.type) {
    const auto type = declared_type(session, *arg.type);
    return type ? as_declared(session, arg, *type, value, span) : Value{};
  }
  if (!standard || standard->unknown()) return value;
  if (standard->get<CountValue>() && value.get<CountValue>()) return value;
  if (standard->get<NumberValue>() || standard->get<CountValue>()) {
    const auto node = to_number(session, *standard, span);
    return node ? as_quantity(session, arg, session.graph[*node].dimension, value, span) : Value{};
  }
  if (standard->is.index() == value.is.index()) return value;
  return wrong_kind(session, arg, describe(*standard), value, span);
}

std::optional<double> known_number(Session& session, const Value& value, Span span) {
  const auto node = to_number(session, value, span);
  if (!node || session.graph[*node].op != NodeOp::constant) return std::nullopt;
  return session.graph[*node].number;
}

void check_range(Session& session, const Scope& scope, const ast::Arg& arg, const Value& value, Span span) {
  if (!arg.range || !(value.get<NumberValue>() || value.get<CountValue>())) return;
  const auto node = to_number(session, value, span);
  const Dimension dimension = session.graph[*node].dimension;
  const auto low = evaluate_quantity(session, scope, arg.range->low, dimension);
  const auto high = evaluate_quantity(session, scope, arg.range->high, dimension);
  if (!low || !high) return;
  const auto x = known_number(session, value, span);
  const auto a = known_number(session, number_value(*low), span);
  const auto b = known_number(session, number_value(*high), span);
  if (a && b && *a > *b) session.report(arg.range->span, diag::empty_range);
  if (!x || !a || !b || *a > *b || (*x >= *a && *x <= *b)) return;
  const Shown low_unit = written_unit(session.ast(scope), arg.range->low, dimension);
  const Shown high_unit = written_unit(session.ast(scope), arg.range->high, dimension);
  session.report(span, diag::out_of_range, arg.name.text, in_unit(*x, low_unit), in_unit(*a, low_unit), in_unit(*b, high_unit));
}

void refuse_spread(Session& session, const ast::Arg& arg) {
  if (arg.spread) session.report(arg.spread->span, diag::not_available, "`spread`", "a fixed value, or `sweep`");
}

}  // namespace

std::optional<DeclaredType> declared_type(Session& session, const ast::TypeText& type) {
  using Kind = DeclaredType::Kind;
  if (const auto* unit = std::get_if<ast::UnitText>(&type.type)) {
    return DeclaredType{Kind::quantity, unit->unit.dimension, {}};
  }
  if (const auto* part = std::get_if<ast::PartType>(&type.type)) {
    constexpr CallableKind kParts[] = {CallableKind::qubit, CallableKind::coupler, CallableKind::schedule,
                                       CallableKind::bath};
    return DeclaredType{Kind::part, {}, kParts[static_cast<std::size_t>(*part)]};
  }
  const ast::Name& word = std::get<ast::Name>(type.type);
  if (word.text == "count") return DeclaredType{Kind::count, {}, {}};
  if (word.text == "truth") return DeclaredType{Kind::truth, {}, {}};
  if (word.text == "text") return DeclaredType{Kind::text, {}, {}};
  if (const auto dimension = named_dimension(word.text)) return DeclaredType{Kind::quantity, *dimension, {}};
  constexpr auto kTypes = std::to_array<std::string_view>(
      {"number", "count", "truth", "text", "angle", "time", "frequency", "rate", "energy", "temperature", "charge",
       "current", "voltage", "flux", "inductance", "capacitance", "resistance"});
  const std::string_view near = near_word(word.text, kTypes);
  auto tail = session.report(word.span, diag::unknown_type, word.text);
  tail.remedy(near.empty() ? "a unit in brackets gives any dimension, as in `[uPhi0^2/Hz]`"
                           : fmt::format("did you mean `{}`?", near));
  return std::nullopt;
}

std::string callable_name(const Callable& callable) { return item_name(*callable.item)->text; }

const std::vector<ast::Arg>& arguments_of(const Callable& callable) {
  if (const auto* law = std::get_if<ast::Law>(callable.item)) return law->args;
  if (const auto* bath = std::get_if<ast::Bath>(callable.item)) return bath->args;
  if (const auto* kind = std::get_if<ast::Kind>(callable.item)) return kind->args;
  if (const auto* chip = std::get_if<ast::Chip>(callable.item)) return chip->args;
  return kNoArguments;
}

Span declaration_span(const Callable& callable) { return item_name(*callable.item)->span; }

namespace {

/// What is given to an argument. `ramp(5 GHz)` given to a schedule binds what follows s; elsewhere
/// it is a call.
Value given_value(Session& session, const Scope& scope, const ast::Arg& arg, ast::ExprId id) {
  const auto* part = arg.type ? std::get_if<ast::PartType>(&arg.type->type) : nullptr;
  const auto* use = std::get_if<ast::Use>(&session.ast(scope).expr(id).node);
  const bool bound = part != nullptr && *part == ast::PartType::schedule && use != nullptr && use->path.call;
  if (!bound || !use->held.empty() || use->under) return evaluate(session, scope, id);
  ast::Path name = use->path;
  name.call = false;
  name.given.clear();
  const Value value = evaluate_path(session, scope, name);
  const auto* schedule = value.get<Callable>();
  if (schedule == nullptr || schedule->kind != CallableKind::schedule) return evaluate(session, scope, id);
  Callable result = *schedule;
  bind_given(session, scope, result, use->path, 1);
  return {std::move(result)};
}

}  // namespace

void bind_given(Session& session, const Scope& scope, Callable& callable, const ast::Path& path, std::size_t skip) {
  const std::vector<ast::Arg>& args = arguments_of(callable);
  std::size_t next = skip;
  for (const ast::Given& given : path.given) {
    const Span span = span_of(session, scope, given.value);
    std::string name;
    const ast::Arg* taken = nullptr;
    if (given.name) {
      name = given.name->text;
      const auto found = std::find_if(args.begin(), args.end(), [&](const ast::Arg& arg) { return arg.name.text == name; });
      if (found == args.end() || static_cast<std::size_t>(found - args.begin()) < skip) {
        std::vector<std::string> known;
        for (std::size_t k = skip; k < args.size(); ++k) known.push_back(args[k].name.text);
        session.report(given.name->span, diag::unknown_argument, callable_name(callable), name)
            .note(declaration_span(callable), "declared here")
            .remedy(offer(name, known, "it takes"));
        callable.misnamed = true;
        evaluate(session, scope, given.value);
        continue;
      }
      taken = &*found;
    } else {
      while (next < args.size() && callable.bound.contains(args[next].name.text)) ++next;
      if (next >= args.size()) {
        session.report(span, diag::too_many_arguments, callable_name(callable), counted(args.size() - std::min(skip, args.size()), "argument"))
            .note(declaration_span(callable), "declared here")
            .remedy(args.size() <= skip ? fmt::format("it is given by its name: `{}`", callable_name(callable)) : std::string());
        evaluate(session, scope, given.value);
        continue;
      }
      taken = &args[next];
      name = taken->name.text;
    }
    // 2 pi may belong to the formula around a spectrum, not to a cutoff that it is given.
    Site plain = scope.site != nullptr ? *scope.site : Site{};
    plain.formula = plain.formula && callable.kind == CallableKind::function;
    const Scope inner{&scope, scope.module, scope.site != nullptr ? &plain : nullptr, {}};
    const Value value = given_value(session, inner, *taken, given.value);
    const auto [at, is_new] = callable.bound.try_emplace(name, BoundValue{std::make_shared<const Value>(value), span});
    if (!is_new) session.report(span, diag::argument_twice, name).note(at->second.span, "given here");
  }
}

bool complete_arguments(Session& session, const Callable& callable, Scope& into, Span span) {
  bool complete = true;
  for (const ast::Arg& arg : arguments_of(callable)) {
    refuse_spread(session, arg);
    std::optional<Value> standard;
    if (arg.value) standard = evaluate(session, into, *arg.value);
    const auto found = callable.bound.find(arg.name.text);
    Value value;
    Span at = arg.value ? span_of(session, into, *arg.value) : arg.span;
    if (found != callable.bound.end()) {
      at = found->second.span;
      value = checked_argument(session, arg, standard, *found->second.value, at);
    } else if (standard) {
      value = checked_argument(session, arg, standard, *standard, at);
    } else {
      // Under another name it may have been given.
      if (!callable.misnamed) {
        session.report(span, diag::missing_argument, callable_name(callable), arg.name.text).note(arg.span, "declared here");
      }
      complete = false;
    }
    check_range(session, into, arg, value, at);
    into.names.insert_or_assign(arg.name.text, Binding{std::move(value), nullptr, false, arg.name.span});
  }
  return complete;
}

void declare_opaque(Session& session, const Callable& callable, Scope& into) {
  for (const ast::Arg& arg : arguments_of(callable)) {
    refuse_spread(session, arg);
    std::optional<Value> standard;
    if (arg.value) standard = evaluate(session, into, *arg.value);
    if (standard) standard = checked_argument(session, arg, standard, *standard, span_of(session, into, *arg.value));
    const auto opaque = [&](Dimension dimension) {
      return opaque_number(session, arg.name.text, dimension, arg.name.span);
    };
    Value value;
    const auto type = arg.type ? declared_type(session, *arg.type) : std::nullopt;
    if (type && type->kind == DeclaredType::Kind::quantity) {
      value = number_value(opaque(type->dimension));
    } else if (type && type->kind == DeclaredType::Kind::count) {
      value = {CountValue{std::nullopt, opaque(kNumber)}};
    } else if (type && type->kind == DeclaredType::Kind::text) {
      value = {TextValue{}};
    } else if (!type && standard && standard->get<CountValue>()) {
      value = {CountValue{std::nullopt, opaque(kNumber)}};
    } else if (!type && standard && standard->get<NumberValue>()) {
      value = number_value(opaque(session.graph[standard->get<NumberValue>()->node].dimension));
    }
    if (standard) check_range(session, into, arg, *standard, span_of(session, into, *arg.value));
    const bool first_of_law = callable.kind == CallableKind::schedule && &arg == &arguments_of(callable).front();
    if (first_of_law) {
      into.names.insert_or_assign(arg.name.text, Binding{std::move(value), nullptr, false, arg.name.span});
    } else {
      declare(session, into, arg.name, std::move(value));
    }
  }
}

bool all_defaulted(const std::vector<ast::Arg>& args) {
  return std::all_of(args.begin(), args.end(), [](const ast::Arg& arg) { return arg.value.has_value(); });
}

std::string type_text(Session& session, const ast::Arg& arg) {
  if (!arg.type) return arg.value ? "as its default" : "anything";
  return std::string(session.text(arg.type->span));
}

}  // namespace tarn
