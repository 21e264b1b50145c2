#include "lang/check/declarations.h"

#include <cmath>
#include <deque>

#include "lang/check/arguments.h"
#include "lang/check/experiment.h"
#include "lang/check/expression.h"
#include "lang/check/predefined.h"
#include "lang/check/remedies.h"

namespace tarn {
namespace {

/// Names every file by the way the main file reaches it first.
void name_modules(Program& program) {
  program.modules.resize(program.loaded->modules.size());
  std::vector<bool> seen(program.modules.size(), false);
  std::deque<std::uint32_t> queue;
  if (!seen.empty()) {
    seen[0] = true;
    queue.push_back(0);
  }
  while (!queue.empty()) {
    const std::uint32_t module = queue.front();
    queue.pop_front();
    for (const Import& import : program.loaded->modules[module].imports) {
      program.modules[module].uses.emplace(import.name, import.module.row);
      if (seen[import.module.row]) continue;
      seen[import.module.row] = true;
      const std::string& prefix = program.modules[module].name;
      program.modules[import.module.row].name = prefix.empty() ? import.name : prefix + "." + import.name;
      queue.push_back(import.module.row);
    }
  }
}

void declare_items(Program& program, std::uint32_t module, Diagnostics& diagnostics) {
  const Ast& ast = program.ast(module);
  auto& items = program.modules[module].items;
  for (std::uint32_t row = 0; row < ast.items.size(); ++row) {
    const ast::Name* name = item_name(ast.items[row]);
    if (name == nullptr) continue;
    if (is_predefined(name->text)) {
      diagnostics.report(name->span, diag::predefined_name, name->text).remedy(predefined_remedy(name->text));
      continue;
    }
    const auto [first, is_new] = items.try_emplace(name->text, row);
    if (!is_new) {
      diagnostics.report(name->span, diag::duplicate_name, name->text)
          .note(item_name(ast.items[first->second])->span, "first declared here");
    }
    if (const auto* experiment = std::get_if<ast::Experiment>(&ast.items[row]); experiment && module == 0 && is_new) {
      program.experiments.push_back({name->text, name->span, experiment->doc, row});
    }
  }
}

class ParameterReader {
 public:
  ParameterReader(Session& session, std::uint32_t module) : session_(session), scope_{nullptr, module, nullptr, {}} {}

  ProgramParameter read(const ast::Arg& arg) {
    ProgramParameter made;
    made.declared = arg.name.text;
    made.module = scope_.module;
    made.span = arg.name.span;
    made.doc = arg.doc;
    const std::string& prefix = session_.program.modules[scope_.module].name;
    made.name = prefix.empty() ? made.declared : prefix + "." + made.declared;
    if (arg.spread) session_.report(arg.spread->span, diag::not_available, "`spread`", "a fixed value, or `sweep`");
    made.broken = !read_type(arg, made);
    made.unit = arg.value ? written_unit(ast(), *arg.value, made.dimension) : shown_unit(made.dimension);
    if (!made.broken) read_value(arg, made);
    if (!made.broken) read_range(arg, made);
    return made;
  }

 private:
  bool read_type(const ast::Arg& arg, ProgramParameter& made) {
    using Kind = DeclaredType::Kind;
    if (!arg.type && !arg.value) {
      session_.report(arg.name.span, diag::parameter_needs, arg.name.text).remedy("`parameter p : time` or `parameter p = 5 ns`");
      return false;
    }
    if (!arg.type) {
      const Value value = evaluate(session_, scope_, *arg.value);
      made.count = value.get<CountValue>() != nullptr;
      const auto node = to_number(session_, value, span_of(session_, scope_, *arg.value));
      if (node) made.dimension = session_.graph[*node].dimension;
      return node.has_value();
    }
    const auto type = declared_type(session_, *arg.type);
    if (!type) return false;
    made.dimension = type->dimension;
    made.count = type->kind == Kind::count;
    if (made.count || type->kind == Kind::quantity) return true;
    session_.report(arg.type->span, diag::parameter_type);
    return false;
  }

  void read_value(const ast::Arg& arg, ProgramParameter& made) {
    if (!arg.value) return;
    if (made.count) {
      const auto count = evaluate_count(session_, scope_, *arg.value);
      if (count) made.value = static_cast<double>(*count);
    } else {
      made.value = evaluate_constant(session_, scope_, *arg.value, made.dimension);
    }
    made.broken = !made.value;
  }

  void read_range(const ast::Arg& arg, ProgramParameter& made) {
    if (!arg.range) return;
    made.lowest = evaluate_constant(session_, scope_, arg.range->low, made.dimension);
    made.highest = evaluate_constant(session_, scope_, arg.range->high, made.dimension);
    if (!made.lowest || !made.highest) return;
    made.lowest_unit = written_unit(ast(), arg.range->low, made.dimension);
    made.highest_unit = written_unit(ast(), arg.range->high, made.dimension);
    if (*made.lowest > *made.highest) {
      session_.report(arg.range->span, diag::empty_range);
      made.lowest.reset();
      made.highest.reset();
      return;
    }
    if (!made.value || (*made.value >= *made.lowest && *made.value <= *made.highest)) return;
    session_.report(span_of(session_, scope_, *arg.value), diag::out_of_range, made.declared,
                    in_unit(*made.value, made.unit), in_unit(*made.lowest, made.lowest_unit),
                    in_unit(*made.highest, made.highest_unit));
  }

  const Ast& ast() const { return session_.program.ast(scope_.module); }

  Session& session_;
  const Scope scope_;
};

void read_parameters(Program& program, Diagnostics& diagnostics) {
  const Overrides none;
  Graph graph;
  Session session{program, graph, diagnostics, none};
  session.constants_only = true;
  for (std::uint32_t module = 0; module < program.modules.size(); ++module) {
    ParameterReader reader(session, module);
    const Ast& ast = program.ast(module);
    const auto& items = program.modules[module].items;
    for (std::uint32_t row = 0; row < ast.items.size(); ++row) {
      const auto* parameter = std::get_if<ast::Parameter>(&ast.items[row]);
      if (parameter == nullptr) continue;
      const auto declared = items.find(parameter->arg.name.text);
      if (declared == items.end() || declared->second != row) continue;
      ProgramParameter made = reader.read(parameter->arg);
      program.parameter_rows.emplace(std::pair(module, made.declared), static_cast<std::uint32_t>(program.parameters.size()));
      program.parameters.push_back(std::move(made));
    }
  }
}

}  // namespace

Program declare_program(Modules modules, Diagnostics& diagnostics) {
  Program program;
  program.loaded = std::make_shared<Modules>(std::move(modules));
  name_modules(program);
  for (std::uint32_t module = 0; module < program.modules.size(); ++module) declare_items(program, module, diagnostics);
  read_parameters(program, diagnostics);
  return program;
}

}  // namespace tarn
