#include "lang/check/path.h"

#include <algorithm>
#include <array>

#include "lang/check/arguments.h"
#include "lang/check/arithmetic.h"
#include "lang/check/chip.h"
#include "lang/check/expression.h"
#include "lang/check/laws.h"
#include "lang/check/predefined.h"
#include "lang/check/readings.h"
#include "lang/check/remedies.h"
#include "lang/check/tables.h"
#include "lang/program/operators.h"
#include "lang/quantities/constants.h"
#include "lang/support/near.h"

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
    std::vector<std::string> known;
    const ProgramModule& file = session.program.modules[*at.module];
    for (const auto& [item, row] : file.items) known.push_back(item);
    session.report(name.span, diag::unknown_name, name.text).remedy(offer(name.text, known, fmt::format("`{}` has", file.name)));
    return Value{};
  }
  return value;
}

/// For `spectra.ohmic` where no file in use is called `spectra`.
std::string file_remedy(const Session& session, const Scope& scope, const std::string& name) {
  constexpr auto kLibrary = std::to_array<std::string_view>({"flux", "graphs", "spectra"});
  if (std::find(kLibrary.begin(), kLibrary.end(), name) != kLibrary.end()) return fmt::format("add `use {}`", name);
  std::vector<std::string> known;
  for (const auto& [file, row] : session.program.modules[scope.module].uses) known.push_back(file);
  const std::string_view near = near_word(name, known);
  if (!near.empty()) return fmt::format("did you mean `{}`?", near);
  const std::string_view library = near_word(name, kLibrary);
  return library.empty() ? std::string() : fmt::format("did you mean `{0}`? it needs `use {0}`", library);
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
    session.report(span_of(session, scope, *step.index), diag::index_out_of_range, step.name.text, *index->value, size)
        .remedy(size > 0 ? fmt::format("its indices are {}", index_range(size)) : std::string());
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

void report_wrong_use(Session& session, const ast::Path& path) {
  const std::string& name = path.steps.front().name.text;
  auto tail = session.report(path.span, diag::wrong_use, name);
  if (is_state_set_word(name)) tail.remedy(fmt::format("to observe it write `population({})`", excerpt(session, path.span)));
  if (is_function(name)) tail.remedy(fmt::format("it takes arguments: `{}(...)`", name));
  if (name == "H") tail.remedy("`mean(H)` is its expectation");
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
    report_wrong_use(session, path);
    return {};
  }
  if (!session.diagnostics.full()) report_unknown_name(session, scope, step.name);
  // Sets of states and levels have a meaning only inside the word that is misspelt here.
  if (readings != nullptr) return {};
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
      const bool pair = site->own_qubits->size() == 2;
      session.report(span, diag::places_in_kind, excerpt(session, span))
          .remedy(pair ? "in a coupler the first letter is the left end, the second the right: `ZZ`" : "write the letter alone");
      return std::nullopt;
    }
    const std::size_t own = site->own_qubits->size();
    if (own == count) return site->own_qubits;
    const std::string written = excerpt(session, span);
    auto tail = session.report(span, diag::operator_size, written, counted(count, "qubit"), own);
    if (own == 1) tail.remedy("what joins two qubits stands in a `coupler`");
    if (own == 2 && count == 1 && !is_pauli_word(written)) tail.remedy("in a coupler an operator has a letter for each end: `|01><10|`");
    if (own == 2 && count == 1 && is_pauli_word(written)) {
      tail.remedy(fmt::format("in a coupler `{0}{0}` acts on both ends, `{0}I` on the left, `I{0}` on the right", written));
    }
    return std::nullopt;
  }
  if (!placed) {
    session.report(span, diag::places_needed, excerpt(session, span)).remedy(fmt::format("`{}(q[0])` names the place", excerpt(session, span)));
    return std::nullopt;
  }
  if (places.size() != count) {
    session.report(span, diag::operator_size, excerpt(session, span), counted(count, "qubit"), places.size())
        .remedy("a letter for each place: `ZZ(q[0], q[1])`");
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

std::optional<CallableKind> kind_of(const ast::Item& item) {
  if (const auto* kind = std::get_if<ast::Kind>(&item)) {
    return kind->element == ast::ElementKind::qubit ? CallableKind::qubit : CallableKind::coupler;
  }
  if (std::holds_alternative<ast::Bath>(item)) return CallableKind::bath;
  if (std::holds_alternative<ast::Chip>(item)) return CallableKind::chip;
  return std::nullopt;
}

/// True for a part that is not declared, which is reported with those that are.
bool report_undeclared(Session& session, const Scope& scope, const ast::Name& name, std::initializer_list<CallableKind> kinds) {
  if (is_predefined(name.text) || look_up(session, scope, name)) return false;
  std::vector<std::string> known;
  for (const ast::Item& item : session.ast(scope).items) {
    const auto kind = kind_of(item);
    if (kind && std::find(kinds.begin(), kinds.end(), *kind) != kinds.end()) known.push_back(item_name(item)->text);
  }
  for (const auto& [file, row] : session.program.modules[scope.module].uses) {
    if (session.program.modules[row].items.contains(name.text)) return false;
  }
  session.report(name.span, diag::unknown_name, name.text).remedy(offer(name.text, known, "there is"));
  return true;
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
    auto tail = session.report(path.span, diag::path_is_no_value, excerpt(session, path.span));
    if (!found) tail.remedy(file_remedy(session, scope, step.name.text));
    return {};
  }
  // `observe T2` gives a name to one of the values that T2 can have.
  const bool measures = path.call && path.steps.size() == 1 && is_reading_word(step.name.text);
  if (measures) return evaluate_word(session, scope, path);
  Value value = *found;
  if (step.index) value = indexed(session, scope, step, value);
  if (path.call) return call_value(session, scope, path, value);
  return settled(session, scope, path, std::move(value));
}

std::optional<Callable> resolve_callable(Session& session, const Scope& scope, const ast::Path& path,
                                         std::initializer_list<CallableKind> kinds, std::string_view expected) {
  if (path.steps.size() == 1 && report_undeclared(session, scope, path.steps.front().name, kinds)) return std::nullopt;
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
  if (path.steps.front().index) {
    session.report(path.span, diag::places_needed, excerpt(session, path.span)).remedy(fmt::format("`{}(q[0])` names the place", word));
    return {};
  }
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
