#include "lang/check/dump.h"

#include <fmt/format.h>

#include <cmath>

#include "lang/check/declarations.h"
#include "lang/program/print.h"

namespace tarn {
namespace {

template <class... Cases>
struct Match : Cases... {
  using Cases::operator()...;
};
template <class... Cases>
Match(Cases...) -> Match<Cases...>;

std::string signature(const std::vector<ProgramArgument>& arguments) {
  std::string result;
  for (const ProgramArgument& argument : arguments) {
    result += fmt::format("{}{} : {}", result.empty() ? "" : ", ", argument.name, argument.type);
  }
  return result;
}

std::string range_text(const std::optional<double>& low, const std::optional<double>& high) {
  return low && high ? fmt::format(" in {} .. {}", *low, *high) : "";
}

void dump_parameters(const Program& program, std::string& out) {
  for (const ProgramParameter& parameter : program.parameters) {
    const std::string type = parameter.count ? "a count" : describe(parameter.dimension);
    out += fmt::format("parameter {} : {}", parameter.name, type);
    if (parameter.value) out += fmt::format(" = {}", *parameter.value);
    out += range_text(parameter.lowest, parameter.highest) + "\n";
  }
}

void dump_laws(const Program& program, std::string& out) {
  const GraphNames names{[&](std::uint32_t index) {
    if (index >= kOpaque) return program.opaque[index - kOpaque];
    return index < program.graph_parameters.size() ? program.graph_parameters[index] : fmt::format("parameter {}", index);
  }};
  for (const ProgramLaw& law : program.laws) {
    out += fmt::format("{} {}({})", law.word, law.name, signature(law.arguments));
    if (law.value) {
      out += fmt::format(" : {} = {}", describe(program.graph[*law.value].dimension), to_text(program.graph, *law.value, names));
    }
    out += "\n";
  }
}

void dump_experiments(const Program& program, std::string& out) {
  for (const ProgramExperiment& experiment : program.experiments) {
    out += fmt::format("experiment {} {{\n", experiment.name);
    const auto& written = std::get<ast::Experiment>(program.ast(0).items[experiment.item]);
    for (const ast::Statement& statement : written.statements) {
      const Span span = std::visit([](const auto& s) { return s.span; }, statement);
      out += "  " + one_line(program.sources().text(span)) + "\n";
    }
    out += "}\n";
  }
}

/// Writes one instance.
class InstanceDump {
 public:
  explicit InstanceDump(const Instance& instance)
      : instance_(instance), names_{[&](std::uint32_t index) { return instance.parameters[index].name; }} {}

  std::string write() {
    line(fmt::format("experiment {} of chip {}", instance_.experiment, instance_.chip));
    parameters();
    chip();
    experiment();
    answers();
    for (const std::string& remark : instance_.remarks) line("remark " + remark);
    return std::move(out_);
  }

 private:
  void line(const std::string& text) { out_ += text + "\n"; }
  std::string expr(NodeId id) const { return to_text(instance_.graph, id, names_); }
  std::string op(const Operator& terms) const {
    return to_text(instance_.graph, terms, static_cast<std::uint32_t>(instance_.qubits.size()), names_);
  }

  void parameters() {
    for (const ParameterUse& use : instance_.parameters) {
      line(fmt::format("parameter {} = {}, {}{}", use.name, use.value, describe(use.dimension), range_text(use.lowest, use.highest)));
    }
    for (std::size_t k = 0; k < instance_.graph.tables.size(); ++k) {
      const TableData& table = instance_.graph.tables[k];
      line(fmt::format("table {}: {}, {} points, {} to {}", k, table.name, table.x.size(), table.x.front(), table.x.back()));
    }
  }

  void chip() {
    for (std::size_t q = 0; q < instance_.qubits.size(); ++q) {
      const InstanceQubit& qubit = instance_.qubits[q];
      line(fmt::format("qubit {} {} : {}{}", q, qubit.path, qubit.kind, qubit.offset ? " offset " + expr(*qubit.offset) : ""));
    }
    for (const EnergyTerm& term : instance_.energy) line(fmt::format("energy {}: {}", term.where, op(term.op)));
    for (const InstanceBath& bath : instance_.baths) {
      line(fmt::format("bath {}: density {}, temperature {}", bath.name, expr(bath.density), expr(bath.temperature)));
    }
    for (const NoiseTerm& term : instance_.noise) line(fmt::format("noise {}: {}", term.what, op(term.op)));
    for (const CorrelationI& c : instance_.correlations) {
      for (std::size_t i = 0; i < c.count; ++i) {
        std::string row;
        for (std::size_t j = 0; j < c.count; ++j) row += (j == 0 ? "" : ", ") + expr(c.elements[i * c.count + j]);
        line(fmt::format("correlation of noise {} with {} .. {}: {}", c.first + i, c.first, c.first + c.count - 1, row));
      }
    }
    for (const JumpTerm& term : instance_.jumps) line(fmt::format("jump {}: {}", term.what, op(term.op)));
  }

  std::string begin_text() const {
    return std::visit(Match{[](const BeginGroundI&) -> std::string { return "ground"; },
                            [&](const BeginThermalI& b) { return b.temperature ? fmt::format("thermal({})", expr(*b.temperature)) : "thermal"; },
                            [](const BeginPlusI&) -> std::string { return "plus"; },
                            [](const BeginSteadyI&) -> std::string { return "steady"; },
                            [](const BeginStateI& b) { return fmt::format("state \"{}\"", b.letters); },
                            [&](const BeginPopulationsI& b) {
                              std::string text = "populations";
                              for (const NodeId weight : b.weights) text += " " + expr(weight);
                              return text;
                            }},
                      *instance_.begin);
  }

  std::string piece_text(const PacePieceI& piece) const {
    return std::visit(Match{[&](const PaceStartI& p) { return "start " + expr(p.s); },
                            [&](const PaceRampI& p) { return fmt::format("ramp to {} over {}", expr(p.to), expr(p.over)); },
                            [&](const PaceHoldI& p) { return "hold for " + expr(p.time); },
                            [&](const PaceStepI& p) { return "step to " + expr(p.to); },
                            [](const PaceFollowI& p) { return fmt::format("follow {} samples over {}", p.t.size(), p.t.back()); }},
                      piece);
  }

  std::string equation_text(const EquationI& equation) const {
    const char* const memories[] = {"markov", "growing", "driven"};
    std::string text = equation.label.empty() ? "" : equation.label + " = ";
    text += word_of(equation.kind);
    if (equation.kind == EquationKind::redfield) text += fmt::format(" memory {}", memories[static_cast<std::size_t>(equation.memory)]);
    if (equation.kind == EquationKind::coarse_grained) text += equation.window ? " window " + expr(*equation.window) : " window auto";
    if (equation.depth) text += fmt::format(" depth {}", *equation.depth);
    return text + (equation.lamb_shift ? "" : " without shift");
  }

  void experiment() {
    if (instance_.begin) line("begin " + begin_text());
    for (const PacePieceI& piece : instance_.pace) line("pace " + piece_text(piece));
    if (instance_.equations.empty()) line("equation none");
    for (const EquationI& equation : instance_.equations) line("equation " + equation_text(equation));
    if (instance_.levels) line(fmt::format("levels {}", *instance_.levels));
    if (instance_.levels_auto) line("levels auto");
    if (instance_.trajectories) line(fmt::format("trajectories {} seed {}", instance_.trajectories->count, instance_.trajectories->seed));
    line(fmt::format("tolerance {}", instance_.tolerance));
    if (!instance_.scan.empty()) line(fmt::format("scan {} values of s", instance_.scan.size()));
    for (const AxisI& axis : instance_.axes) {
      for (const AxisColumnI& column : axis.columns) {
        line(fmt::format("sweep {} over {} values, {} to {}", column.parameter, column.values.size(), column.values.front(), column.values.back()));
      }
    }
    line(fmt::format("points {}", instance_.points.size()));
  }

  std::string set_text(const StateSetI& set) const {
    const char* const words[] = {"ground", "level", "state", "any", "target"};
    std::string text = words[static_cast<std::size_t>(set.kind)];
    if (set.kind == SetKind::level) text += fmt::format(" {}", set.level);
    if (set.kind == SetKind::state) text += " " + set.letters;
    return set.within ? text + " within " + expr(*set.within) : text;
  }

  std::string reading_text(const ReadingI& reading) const {
    return std::visit(Match{[&](const PopulationI& r) { return "population of " + set_text(r.set); },
                            [&](const MeanI& r) { return "mean of " + op(r.op); },
                            [](const MeanEnergyI&) -> std::string { return "mean of H"; },
                            [](const LevelI& r) { return fmt::format("level {}", r.level); },
                            [](const GapI&) -> std::string { return "gap"; },
                            [](const PurityI&) -> std::string { return "purity"; },
                            [](const CoherenceI& r) { return fmt::format("coherence {} {}", r.row, r.column); },
                            [](const FidelityI& r) { return "fidelity with " + r.letters; },
                            [](const RelaxationI&) -> std::string { return "T1"; },
                            [](const DephasingI& r) { return fmt::format("T2 {} {}", r.row, r.column); },
                            [](const VerdictI&) -> std::string { return "verdict"; },
                            [](const ReduceI& r) {
                              const char* const words[] = {"lowest", "highest", "final"};
                              return fmt::format("{} of observable {}", words[static_cast<std::size_t>(r.over)], r.observable);
                            }},
                      reading);
  }

  std::string moment_text(const MomentI& moment) const {
    return std::visit(Match{[](const AtEndI&) -> std::string { return "at end"; },
                            [&](const AtTimeI& m) { return "at t = " + expr(m.time); },
                            [&](const AtSI& m) { return fmt::format("at s = {} {}", expr(m.s), m.last ? "last" : "first"); },
                            [](const AlongI& m) { return fmt::format("along {}", m.samples); },
                            [](const StaticI&) -> std::string { return "static"; }},
                      moment);
  }

  void answers() {
    for (std::size_t k = 0; k < instance_.readings.size(); ++k) line(fmt::format("reading {}: {}", k, reading_text(instance_.readings[k])));
    for (std::size_t k = 0; k < instance_.observables.size(); ++k) {
      const ObservableI& o = instance_.observables[k];
      line(fmt::format("observable {} {}{} = {} [{}] {}", k, o.name, o.shown ? "" : " (for a claim)", expr(o.value), o.unit.label, moment_text(o.moment)));
    }
    if (instance_.distribution_at_end) line("distribution at end");
    for (std::size_t k = 0; k < instance_.under.size(); ++k) {
      const UnderI& under = instance_.under[k];
      line(fmt::format("under {}: observable {} under {}", k, under.observable, instance_.equations[under.equation].label));
    }
    for (const ClaimI& claim : instance_.claims) {
      line(fmt::format("claim {}{}", expr(claim.holds), claim.where ? " where " + expr(*claim.where) : ""));
    }
  }

  const Instance& instance_;
  GraphNames names_;
  std::string out_;
};

}  // namespace

std::string dump(const Program& program) {
  std::string out;
  dump_parameters(program, out);
  dump_laws(program, out);
  for (const ProgramPart& part : program.parts) {
    out += fmt::format("{} {}({}) {{\n", part.word, part.name, signature(part.arguments));
    for (const std::string& line : part.lines) out += "  " + line + "\n";
    out += "}\n";
  }
  dump_experiments(program, out);
  return out;
}

std::string dump(const Instance& instance) { return InstanceDump(instance).write(); }

}  // namespace tarn
