#include <array>

#include "lang/check/expression.h"
#include "lang/check/predefined.h"
#include "lang/check/session.h"
#include "lang/support/near.h"
#include "lang/syntax/habits.h"

namespace tarn {
namespace {

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
  for (const std::string_view word : predefined_words()) known.emplace_back(word);
}

}  // namespace

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
  session.report(name.span, diag::predefined_name, name.text).remedy(predefined_remedy(name.text));
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

namespace {

/// `spectra.ohmic` for `ohmic`; empty if no file in use declares the name.
std::string name_in_used_file(const Session& session, std::uint32_t module, const std::string& name) {
  for (const auto& [file, row] : session.program.modules[module].uses) {
    if (session.program.modules[row].items.contains(name)) return file + "." + name;
  }
  return {};
}

}  // namespace

void report_unknown_name(Session& session, const Scope& scope, const ast::Name& name) {
  constexpr std::size_t kMostCompared = 1000;
  std::vector<std::string> known;
  if (session.program.modules[scope.module].items.size() < kMostCompared) collect_names(session, scope, known);
  auto tail = session.report(name.span, diag::unknown_name, name.text);
  const std::string inside = name_in_used_file(session, scope.module, name.text);
  const std::string near = inside.empty() ? std::string(near_word(name.text, known)) : inside;
  tail.remedy(near.empty() ? std::string(value_for(name.text)) : fmt::format("did you mean `{}`?", near));
}

}  // namespace tarn
