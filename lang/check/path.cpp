#include "lang/check/path.h"

#include <algorithm>

#include "lang/check/arguments.h"
#include "lang/check/arithmetic.h"
#include "lang/check/chip.h"
#include "lang/check/expression.h"
#include "lang/check/laws.h"
#include "lang/check/readings.h"
#include "lang/check/tables.h"
#include "lang/program/operators.h"
#include "lang/quantities/constants.h"

namespace tarn {
namespace {

/// A path after the names of files in front of it.
struct Resolved {
  std::size_t step = 0;  ///< The step that names a declaration.
  std::optional<std::uint32_t> module;
};

bool declared_inside(const Scope& scope, std::string_view name) {
  for (const Scope* at = &scope; at != nullptr; at = at->outer) {
    if (at->names.contains(name)) return true;
  }
  return false;
}

Resolved resolve_modules(const Session& session, const Scope& scope, const ast::Path& path) {
  Resolved result;
  if (path.steps.size() < 2 || declared_inside(scope, path.steps[0].name.text)) return result;
  std::uint32_t module = scope.module;
  while (result.step + 1 < path.steps.size() && !path.steps[result.step].index) {
    const auto next = find_module(session, module, path.steps[result.step].name.text);
    if (!next) break;
    module = *next;
    result.module = module;
    ++result.step;
  }
  return result;
}

std::optional<Value> named_value(Session& session, const Scope& scope, const Resolved& at, const ast::Name& name) {
  if (!at.module) return look_up(session, scope, name);
  auto value = look_up_in_file(session, *at.module, name);
  if (!value) {
    const Scope file{nullptr, *at.module, nullptr, {}};
    report_unknown_name(session, file, name);
    return Value{};
  }
  return value;
}

Value not_here(Session& session, const Scope& scope, const ast::Name& name) {
  const std::string where(scope.site != nullptr ? scope.site->where : "here");
  session.report(name.span, diag::name_not_here, name.text, where);
  return {};
}

/// pi hbar kB e s t; nothing for other words.
std::optional<Value> predefined_value(Session& session, const Scope& scope, const ast::Name& name) {
  for (const PredefinedConstant& constant : kPredefinedConstants) {
    if (constant.name != name.text) continue;
    return number_value(session.graph.constant(constant.value, constant.dimension, name.span));
  }
  if (name.text != "s" && name.text != "t") return std::nullopt;
  const Site* site = scope.site;
  const std::optional<NodeId> node = site == nullptr ? std::nullopt : name.text == "s" ? site->s : site->t;
  return node ? number_value(*node) : not_here(session, scope, name);
}

/// `2*pi*f*t`: an angle that has its 2 pi already.
void collect_factors(const Ast& ast, ast::ExprId id, std::vector<ast::ExprId>& factors) {
  while (true) {
    if (const auto* unary = std::get_if<ast::Unary>(&ast.expr(id).node)) {
      id = unary->operand;
      continue;
    }
    const auto* binary = std::get_if<ast::Binary>(&ast.expr(id).node);
    const bool multiplies = binary != nullptr && (binary->op == ast::BinaryOp::multiply || binary->op == ast::BinaryOp::divide);
    if (!multiplies) break;
    collect_factors(ast, binary->right, factors);
    id = binary->left;
  }
  factors.push_back(id);
}

void warn_counted_twice(Session& session, const Scope& scope, ast::ExprId argument) {
  const Ast& ast = session.ast(scope);
  if (const auto* sum = std::get_if<ast::Binary>(&ast.expr(argument).node)) {
    if (sum->op == ast::BinaryOp::add || sum->op == ast::BinaryOp::subtract) {
      warn_counted_twice(session, scope, sum->left);
      warn_counted_twice(session, scope, sum->right);
      return;
    }
  }
  std::vector<ast::ExprId> factors;
  collect_factors(ast, argument, factors);
  bool two = false, pi = false, frequency = false;
  for (const ast::ExprId factor : factors) {
    const ast::ExprNode& node = ast.expr(factor).node;
    if (const auto* number = std::get_if<ast::Number>(&node); number != nullptr && !number->unit) two = two || number->value == 2;
    if (const auto* use = std::get_if<ast::Use>(&node)) {
      pi = pi || (use->path.steps.size() == 1 && use->path.steps[0].name.text == "pi");
    }
    const Value value = evaluate(session, scope, factor);
    const auto* quantity = value.get<NumberValue>();
    frequency = frequency || (quantity != nullptr && session.graph[quantity->node].dimension == kFrequency);
  }
  if (!two || !pi || !frequency) return;
  const Span span = ast.expr(argument).span;
  session.report(span, diag::counted_twice, excerpt(session, span)).remedy("leave out `2*pi`: a frequency counts cycles as 2 pi rad already");
}

Value evaluate_function(Session& session, const Scope& scope, const ast::Path& path) {
  const std::string& name = path.steps.front().name.text;
  std::vector<Operand> arguments;
  for (const ast::Given& given : path.given) {
    if (given.name) {
      session.report(given.name->span, diag::unknown_argument, name, given.name->text);
      return {};
    }
    arguments.push_back({evaluate(session, scope, given.value), span_of(session, scope, given.value)});
  }
  const bool periodic = name == "sin" || name == "cos" || name == "tan";
  if (periodic && arguments.size() == 1) warn_counted_twice(session, scope, path.given.front().value);
  return call_function(session, name, arguments, path.span);
}

Value indexed(Session& session, const Scope& scope, const ast::Step& step, const Value& value) {
  const auto index = to_count(session, evaluate(session, scope, *step.index), span_of(session, scope, *step.index));
  const auto* list = value.get<ListValue>();
  if (list == nullptr) {
    if (!value.unknown()) session.report(step.name.span, diag::not_a_list, step.name.text, describe(value));
    return {};
  }
  if (!index) return {};
  const auto size = static_cast<std::int64_t>(list->items->size());
  if (!index->value) return opaque_item(session, *list, step.name.span);
  if (*index->value < 0 || *index->value >= size) {
    session.report(span_of(session, scope, *step.index), diag::index_out_of_range, step.name.text, *index->value, size);
    return {};
  }
  return (*list->items)[static_cast<std::size_t>(*index->value)];
}

Value call_value(Session& session, const Scope& scope, const ast::Path& path, const Value& value) {
  const auto* callable = value.get<Callable>();
  if (callable == nullptr) {
    for (const ast::Given& given : path.given) evaluate(session, scope, given.value);
    if (!value.unknown()) session.report(path.span, diag::not_callable, path.steps.back().name.text, describe(value));
    return {};
  }
  Callable bound = *callable;
  const Site* site = scope.site;
  const bool named = callable->kind == CallableKind::spectrum && site != nullptr && site->spectrum_argument;
  bind_given(session, scope, bound, path, named ? 1 : 0);
  if (named) return spectrum_at(session, bound, *site->spectrum_argument, path.span);
  return callable->kind <= CallableKind::function ? call_law(session, bound, path.span) : Value{std::move(bound)};
}

/// A spectrum named alone where a bath takes its density.
Value settled(Session& session, const Scope& scope, const ast::Path& path, Value value) {
  const auto* callable = value.get<Callable>();
  if (callable == nullptr || callable->kind != CallableKind::spectrum || scope.site == nullptr) return value;
  if (!scope.site->spectrum_argument) return value;
  return spectrum_at(session, *callable, *scope.site->spectrum_argument, path.span);
}

/// A word that the file does not declare.
Value evaluate_word(Session& session, const Scope& scope, const ast::Path& path) {
  const ast::Step& step = path.steps.front();
  const std::string& name = step.name.text;
  if (!path.call && !step.index) {
    if (const auto value = predefined_value(session, scope, step.name)) return *value;
  }
  if (path.call && is_function(name)) return evaluate_function(session, scope, path);
  if (path.call && is_table_function(name)) return call_table_function(session, scope, path);
  if (is_reading_word(name)) {
    if (scope.site == nullptr || scope.site->readings == nullptr) return not_here(session, scope, step.name);
    return evaluate_reading(session, scope, path);
  }
  const Readings* readings = scope.site != nullptr ? scope.site->readings : nullptr;
  if (readings != nullptr && readings->by_name.contains(name)) {
    session.report(path.span, diag::other_moment, name);
    return {};
  }
  if (is_predefined(name)) {
    session.report(path.span, diag::wrong_use, name);
    return {};
  }
  if (!session.diagnostics.full()) report_unknown_name(session, scope, step.name);
  for (const ast::Given& given : path.given) evaluate(session, scope, given.value);
  return {};
}

Value no_operator_here(Session& session, const Scope& scope, Span span) {
  const std::string where(scope.site != nullptr ? scope.site->where : "here");
  session.report(span, diag::operator_not_here, excerpt(session, span), where);
  return {};
}

/// The qubits that a word of `count` letters acts on; nothing if reported or unknown.
std::optional<std::vector<std::uint32_t>> letter_qubits(Session& session, const Scope& scope, std::size_t count,
                                                        const std::vector<const ast::Path*>& places, bool placed, Span span) {
  const Site* site = scope.site;
  if (site == nullptr || !site->operators || (!site->own_qubits && site->chip == nullptr)) {
    no_operator_here(session, scope, span);
    return std::nullopt;
  }
  if (site->own_qubits) {
    if (placed) {
      session.report(span, diag::places_in_kind, excerpt(session, span));
      return std::nullopt;
    }
    const std::size_t own = site->own_qubits->size();
    if (own == count) return site->own_qubits;
    session.report(span, diag::operator_size, excerpt(session, span), count, own);
    return std::nullopt;
  }
  if (!placed) {
    session.report(span, diag::places_needed, excerpt(session, span)).remedy(fmt::format("`{}(q[0])` names the place", excerpt(session, span)));
    return std::nullopt;
  }
  if (places.size() != count) {
    session.report(span, diag::operator_size, excerpt(session, span), count, places.size());
    return std::nullopt;
  }
  std::vector<std::uint32_t> qubits;
  for (const ast::Path* place : places) {
    const auto qubit = find_qubit(session, scope, *place);
    if (!qubit) return std::nullopt;
    if (std::find(qubits.begin(), qubits.end(), *qubit) != qubits.end()) {
      session.report(place->span, diag::same_qubit_twice, excerpt(session, place->span));
      return std::nullopt;
    }
    qubits.push_back(*qubit);
  }
  return qubits;
}

}  // namespace

Value evaluate_path(Session& session, const Scope& scope, const ast::Path& path) {
  const Resolved at = resolve_modules(session, scope, path);
  const ast::Step& step = path.steps[at.step];
  if (!at.module && path.steps.size() == 1 && is_pauli_word(step.name.text)) return evaluate_letters(session, scope, path);
  const auto found = named_value(session, scope, at, step.name);
  if (!found && path.steps.size() == 1) return evaluate_word(session, scope, path);
  if (at.step + 1 < path.steps.size()) {
    if (found && found->unknown()) return {};
    session.report(path.span, diag::path_is_no_value, excerpt(session, path.span));
    return {};
  }
  Value value = *found;
  if (step.index) value = indexed(session, scope, step, value);
  if (path.call) return call_value(session, scope, path, value);
  return settled(session, scope, path, std::move(value));
}

std::optional<Callable> resolve_callable(Session& session, const Scope& scope, const ast::Path& path,
                                         std::initializer_list<CallableKind> kinds, std::string_view expected) {
  const Value value = evaluate_path(session, scope, path);
  if (value.unknown()) return std::nullopt;
  const auto* callable = value.get<Callable>();
  if (callable != nullptr && std::find(kinds.begin(), kinds.end(), callable->kind) != kinds.end()) return *callable;
  auto tail = session.report(path.span, diag::wrong_kind, std::string(expected), describe(value));
  if (callable != nullptr) tail.note(declaration_span(*callable), "declared here");
  return std::nullopt;
}

Value evaluate_letters(Session& session, const Scope& scope, const ast::Path& path) {
  const std::string& word = path.steps.front().name.text;
  std::vector<const ast::Path*> places;
  for (const ast::Given& given : path.given) {
    const auto* use = std::get_if<ast::Use>(&session.ast(scope).expr(given.value).node);
    if (given.name || use == nullptr) {
      session.report(given.span, diag::place_expected, excerpt(session, given.span));
      return {};
    }
    places.push_back(&use->path);
  }
  const auto qubits = letter_qubits(session, scope, word.size(), places, path.call, path.span);
  if (!qubits) return {};
  return {OperatorValue{pauli(session.graph, word, *qubits, path.span), kNumber}};
}

Value evaluate_ketbra(Session& session, const Scope& scope, const ast::Ketbra& ketbra_text, Span span) {
  std::vector<const ast::Path*> places;
  for (const ast::Path& place : ketbra_text.places) places.push_back(&place);
  const std::size_t letters = ketbra_text.ket.size();
  const auto qubits = letter_qubits(session, scope, letters, places, !places.empty(), span);
  if (!qubits) return {};
  if (letters > 12) {
    session.report(span, diag::operator_too_large, kMaxOperatorTerms);
    return {};
  }
  return {OperatorValue{ketbra(session.graph, ketbra_text.ket, ketbra_text.bra, *qubits, span), kNumber}};
}

}  // namespace tarn
