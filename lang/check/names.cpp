#include <algorithm>
#include <array>

#include "lang/check/expression.h"
#include "lang/check/session.h"
#include "lang/quantities/constants.h"

namespace tarn {
namespace {

constexpr std::array kPredefined = std::to_array<std::string_view>(
    {"pi", "hbar", "kB", "e", "s", "t", "H", "exp", "ln", "log10", "sqrt", "sin", "cos", "tan", "asin", "acos",
     "atan", "sinh", "cosh", "tanh", "abs", "floor", "mod", "min", "max", "clamp", "table", "list", "column",
     "rows", "ground", "level", "state", "any", "target", "population", "mean", "E", "gap", "purity", "coherence",
     "fidelity", "rate", "T1", "T2", "effective_temperature", "lowest", "highest", "final", "verdict", "within",
     "marginal", "outside", "quantile", "fraction"});

/// Levenshtein distance, cut off early where the lengths differ much.
std::size_t distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) row[j] = j;
  for (std::size_t i = 0; i < a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i + 1;
    for (std::size_t j = 0; j < b.size(); ++j) {
      const std::size_t change = diagonal + (a[i] == b[j] ? 0 : 1);
      diagonal = row[j + 1];
      row[j + 1] = std::min({change, row[j] + 1, diagonal + 1});
    }
  }
  return row[b.size()];
}

std::optional<Value> let_value(Session& session, const Scope& scope, Binding& binding, const ast::Name& name) {
  if (binding.busy) {
    session.report(name.span, diag::cyclic_definition, name.text).note(binding.span, "declared here");
    return Value{};
  }
  binding.busy = true;
  Value value = evaluate(session, scope, binding.let->value);
  binding.busy = false;
  binding.value = std::move(value);
  return binding.value;
}

/// Value of a file's declaration that is no `let`.
std::optional<Value> item_value(Session& session, std::uint32_t module, const ast::Item& item, const ast::Name& name) {
  const auto callable = [&](CallableKind kind) { return Value{Callable{kind, module, &item, {}}}; };
  if (std::holds_alternative<ast::Parameter>(item)) {
    const auto& rows = session.program.parameter_rows;
    const auto found = rows.find({module, name.text});
    if (found != rows.end()) return parameter_value(session, found->second, name.span);
    if (session.constants_only) session.report(name.span, diag::constant_needed, name.text);
    return Value{};
  }
  if (const auto* law = std::get_if<ast::Law>(&item)) {
    constexpr std::array kKinds = {CallableKind::schedule, CallableKind::spectrum, CallableKind::psd,
                                   CallableKind::function};
    return callable(kKinds[static_cast<std::size_t>(law->kind)]);
  }
  if (std::holds_alternative<ast::Bath>(item)) return callable(CallableKind::bath);
  if (const auto* kind = std::get_if<ast::Kind>(&item)) {
    return callable(kind->element == ast::ElementKind::qubit ? CallableKind::qubit : CallableKind::coupler);
  }
  if (std::holds_alternative<ast::Chip>(item)) return callable(CallableKind::chip);
  return std::nullopt;
}

void collect_names(const Session& session, const Scope& scope, std::vector<std::string>& known) {
  for (const Scope* at = &scope; at != nullptr; at = at->outer) {
    for (const auto& [name, binding] : at->names) known.push_back(name);
  }
  const ProgramModule& module = session.program.modules[scope.module];
  for (const auto& [name, row] : module.items) known.push_back(name);
  for (const auto& [name, row] : module.uses) known.push_back(name);
  for (const std::string_view word : kPredefined) known.emplace_back(word);
}

}  // namespace

bool is_pauli_word(std::string_view name) {
  return !name.empty() && name.find_first_not_of("IXYZ") == std::string_view::npos;
}

bool is_predefined(std::string_view name) {
  return is_pauli_word(name) || std::find(kPredefined.begin(), kPredefined.end(), name) != kPredefined.end();
}

const ast::Name* item_name(const ast::Item& item) {
  if (const auto* parameter = std::get_if<ast::Parameter>(&item)) return &parameter->arg.name;
  return std::visit(
      [](const auto& declaration) -> const ast::Name* {
        if constexpr (requires { declaration.name; }) {
          return &declaration.name;
        } else {
          return nullptr;
        }
      },
      item);
}

bool check_declarable(Session& session, const ast::Name& name) {
  if (!is_predefined(name.text)) return true;
  auto tail = session.report(name.span, diag::predefined_name, name.text);
  if (is_pauli_word(name.text)) tail.remedy("words of I X Y Z are operators");
  return false;
}

void declare(Session& session, Scope& scope, const ast::Name& name, Value value) {
  if (!check_declarable(session, name)) return;
  const auto [found, is_new] = scope.names.try_emplace(name.text, Binding{std::move(value), nullptr, false, name.span});
  if (!is_new) session.report(name.span, diag::duplicate_name, name.text).note(found->second.span, "first declared here");
}

void declare_let(Session& session, Scope& scope, const ast::Let& let) {
  if (!check_declarable(session, let.name)) return;
  const auto [found, is_new] = scope.names.try_emplace(let.name.text, Binding{std::nullopt, &let, false, let.name.span});
  if (!is_new) {
    session.report(let.name.span, diag::duplicate_name, let.name.text).note(found->second.span, "first declared here");
  }
}

std::optional<Value> look_up(Session& session, const Scope& scope, const ast::Name& name) {
  for (const Scope* at = &scope; at != nullptr; at = at->outer) {
    const auto found = at->names.find(name.text);
    if (found == at->names.end()) continue;
    Binding& binding = found->second;
    if (binding.value) return binding.value;
    return let_value(session, *at, binding, name);
  }
  return look_up_in_file(session, scope.module, name);
}

std::optional<Value> look_up_in_file(Session& session, std::uint32_t module, const ast::Name& name) {
  Binding& binding = session.file_names[{module, name.text}];
  if (binding.value) return binding.value;
  const Scope file{nullptr, module, nullptr, {}};
  if (binding.let != nullptr) return let_value(session, file, binding, name);
  const auto& items = session.program.modules[module].items;
  const auto found = items.find(name.text);
  if (found == items.end()) return std::nullopt;
  const ast::Item& item = session.program.ast(module).items[found->second];
  binding.span = item_name(item)->span;
  if (const auto* let = std::get_if<ast::Let>(&item)) {
    binding.let = let;
    return let_value(session, file, binding, name);
  }
  return item_value(session, module, item, name);
}

std::optional<std::uint32_t> find_module(const Session& session, std::uint32_t module, std::string_view name) {
  const auto& uses = session.program.modules[module].uses;
  const auto found = uses.find(std::string(name));
  return found == uses.end() ? std::nullopt : std::optional(found->second);
}

std::string nearest(std::string_view word, const std::vector<std::string>& known) {
  const std::size_t limit = std::max<std::size_t>(1, word.size() / 3);
  std::size_t best = limit + 1;
  std::string found;
  for (const std::string& candidate : known) {
    if (candidate.size() > word.size() + limit || word.size() > candidate.size() + limit) continue;
    const std::size_t d = distance(word, candidate);
    if (d < best) {
      best = d;
      found = candidate;
    }
  }
  return found;
}

void report_unknown_name(Session& session, const Scope& scope, const ast::Name& name) {
  constexpr std::size_t kMostCompared = 1000;
  std::vector<std::string> known;
  if (session.program.modules[scope.module].items.size() < kMostCompared) collect_names(session, scope, known);
  const std::string near = nearest(name.text, known);
  auto tail = session.report(name.span, diag::unknown_name, name.text);
  if (!near.empty()) tail.remedy(fmt::format("did you mean `{}`?", near));
}

}  // namespace tarn
