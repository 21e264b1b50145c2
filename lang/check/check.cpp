#include "lang/check/check.h"

#include <algorithm>

#include "lang/check/arguments.h"
#include "lang/check/declarations.h"
#include "lang/check/elements.h"
#include "lang/check/expression.h"
#include "lang/check/instantiate.h"
#include "lang/check/laws.h"
#include "lang/check/remedies.h"

namespace tarn {
namespace {

std::vector<ProgramArgument> argument_list(Session& session, const Callable& callable) {
  std::vector<ProgramArgument> result;
  const std::string_view first = first_argument(callable.kind);
  for (const ast::Arg& arg : arguments_of(callable)) {
    const bool known = !first.empty() && result.empty();
    result.push_back({arg.name.text, known ? std::string(first == "s" ? "number" : "frequency") : type_text(session, arg)});
  }
  return result;
}

std::string qualified(const Program& program, std::uint32_t module, const std::string& name) {
  const std::string& prefix = program.modules[module].name;
  return prefix.empty() ? name : prefix + "." + name;
}

std::string_view law_word(ast::LawKind kind) {
  switch (kind) {
    case ast::LawKind::schedule: return "schedule";
    case ast::LawKind::spectrum: return "spectrum";
    case ast::LawKind::psd: return "psd";
    case ast::LawKind::function: return "function";
  }
  return {};
}

/// Statements between the braces, as written, one a line.
template <class Entries>
std::vector<std::string> statements_as_written(Session& session, const Entries& entries) {
  std::vector<std::string> lines;
  for (const auto& entry : entries) {
    lines.push_back(std::visit([&](const auto& statement) { return one_line(session.text(statement.span)); }, entry));
  }
  return lines;
}

/// Checks one declaration by itself and describes it.
class DeclarationChecker {
 public:
  DeclarationChecker(Session& session, Program& program) : session_(session), program_(program) {}

  void check(std::uint32_t module, const ast::Item& item) {
    const ast::Name* name = item_name(item);
    if (name == nullptr) return;
    if (std::holds_alternative<ast::Let>(item)) {
      look_up_in_file(session_, module, *name);
      return;
    }
    const auto value = std::holds_alternative<ast::Experiment>(item) || std::holds_alternative<ast::UseItem>(item)
                           ? std::nullopt
                           : look_up_in_file(session_, module, *name);
    const auto* callable = value ? value->get<Callable>() : nullptr;
    // A declaration whose name is taken stands for the first of that name.
    if (callable == nullptr || callable->item != &item) return;
    check_callable(*callable, qualified(program_, module, name->text));
  }

 private:
  void check_callable(const Callable& callable, const std::string& name) {
    auto arguments = argument_list(session_, callable);
    if (const auto* law = std::get_if<ast::Law>(callable.item)) {
      const auto value = check_law(session_, callable);
      program_.laws.push_back({std::string(law_word(law->kind)), name, std::move(arguments), value});
    } else if (const auto* bath = std::get_if<ast::Bath>(callable.item)) {
      check_bath(session_, callable);
      program_.parts.push_back({"bath", name, std::move(arguments), statements_as_written(session_, bath->entries)});
    } else if (std::holds_alternative<ast::Kind>(*callable.item)) {
      auto lines = check_kind(session_, callable);
      const auto& entries = std::get<ast::Kind>(*callable.item).entries;
      const auto is_let = [](const ast::KindEntry& entry) { return std::holds_alternative<ast::Let>(entry); };
      const auto terms = entries.size() - static_cast<std::size_t>(std::count_if(entries.begin(), entries.end(), is_let));
      if (lines.size() < terms) lines = statements_as_written(session_, entries);
      const std::string word = callable.kind == CallableKind::qubit ? "qubit" : "coupler";
      program_.parts.push_back({word, name, std::move(arguments), std::move(lines)});
    } else if (const auto* chip = std::get_if<ast::Chip>(callable.item)) {
      check_chip(session_, callable);
      program_.parts.push_back({"chip", name, std::move(arguments), statements_as_written(session_, chip->entries)});
    }
  }

  Session& session_;
  Program& program_;
};

void check_declarations(Program& program, std::uint64_t& steps, Diagnostics& diagnostics) {
  const Overrides none;
  Graph graph;
  Session session{program, graph, diagnostics, none};
  session.generic = true;
  session.resume(steps);
  DeclarationChecker checker(session, program);
  for (std::uint32_t module = 0; module < program.modules.size(); ++module) {
    for (const ast::Item& item : program.ast(module).items) checker.check(module, item);
  }
  steps = session.steps;
  program.graph = std::move(graph);
  program.opaque = session.opaque;
  for (const ParameterUse& use : session.parameters) program.graph_parameters.push_back(use.name);
}

/// A chip that needs no arguments is unrolled, so that its places are checked too.
void check_closed_chips(const Program& program, std::uint64_t& steps, Diagnostics& diagnostics) {
  const Overrides none;
  for (std::uint32_t module = 0; module < program.modules.size(); ++module) {
    for (const ast::Item& item : program.ast(module).items) {
      const auto* chip = std::get_if<ast::Chip>(&item);
      if (chip == nullptr || !all_defaulted(chip->args)) continue;
      Graph graph;
      Session session{program, graph, diagnostics, none};
      session.resume(steps);
      session.trial = true;
      Unrolled unrolled;
      unroll_chip(session, {CallableKind::chip, module, &item, {}}, "", unrolled, chip->name.span);
      steps = session.steps;
    }
  }
}

}  // namespace

std::string one_line(std::string_view text) {
  std::string result;
  for (const char c : text) {
    const bool blank = c == ' ' || c == '\n' || c == '\t' || c == '\r';
    if (blank && (result.empty() || result.back() == ' ')) continue;
    result += blank ? ' ' : c;
  }
  return result;
}

Program check(Modules modules, Diagnostics& diagnostics) {
  Program program = declare_program(std::move(modules), diagnostics);
  std::uint64_t steps = 0;
  check_declarations(program, steps, diagnostics);
  check_closed_chips(program, steps, diagnostics);
  for (std::uint32_t k = 0; k < program.experiments.size(); ++k) {
    elaborate_experiment(program, k, {}, true, steps, diagnostics);
  }
  for (const Diagnostic& said : diagnostics.all()) {
    if (said.severity != Severity::error) program.told.add(said);
  }
  return program;
}

std::optional<std::uint32_t> find_experiment(const Program& program, const std::string& name, Diagnostics& diagnostics) {
  std::vector<std::string> known;
  for (std::uint32_t k = 0; k < program.experiments.size(); ++k) {
    if (program.experiments[k].name == name || (name.empty() && program.experiments.size() == 1)) return k;
    known.push_back(program.experiments[k].name);
  }
  const SourceFile& typed = program.loaded->sources.add("command line", fmt::format("--experiment {}", name));
  const auto end = static_cast<std::uint32_t>(typed.text.size());
  const Span asked{typed.id, end - static_cast<std::uint32_t>(name.size()), end};
  diagnostics.report(asked, diag::unknown_experiment, name).remedy(offer(name, known, "experiments:"));
  return std::nullopt;
}

std::vector<Instance> instances(const Program& program, std::uint32_t experiment, const Overrides& overrides,
                                Diagnostics& diagnostics) {
  std::uint64_t steps = 0;
  diagnostics.know(program.told);
  return elaborate_experiment(program, experiment, overrides, false, steps, diagnostics);
}

std::optional<Instance> instantiate(const Program& program, std::uint32_t experiment, const Overrides& overrides,
                                    Diagnostics& diagnostics) {
  auto all = instances(program, experiment, overrides, diagnostics);
  if (all.empty()) return std::nullopt;
  return std::move(all.front());
}

}  // namespace tarn
