#include <algorithm>
#include <cmath>

#include "lang/check/arguments.h"
#include "lang/check/experiment.h"
#include "lang/check/expression.h"
#include "lang/check/instantiate.h"
#include "lang/check/path.h"
#include "lang/program/operators.h"

namespace tarn {
namespace {

constexpr std::uint64_t kMaxPoints = 1'000'000;
constexpr std::uint64_t kMaxInstances = 256;

template <class Statement>
void take_once(Session& session, const Statement*& slot, const Statement& statement, std::string_view word) {
  if (slot != nullptr) {
    session.report(statement.span, diag::statement_twice, std::string(word)).note(slot->span, "first here");
    return;
  }
  slot = &statement;
}

void refuse(Session& session, Span span, std::string_view word, std::string_view now) {
  session.report(span, diag::not_available, fmt::format("`{}`", word), std::string(now));
}

struct Sorter {
  Session& session;
  Statements result{};

  void operator()(const ast::Let& let) { result.lets.push_back(&let); }
  void operator()(const ast::ChipUse& chip) { take_once(session, result.chip, chip, "chip"); }
  void operator()(const ast::Begin& begin) { take_once(session, result.begin, begin, "begin"); }
  void operator()(const ast::Pace& pace) { take_once(session, result.pace, pace, "pace"); }
  void operator()(const ast::Equation& equation) { take_once(session, result.equation, equation, "equation"); }
  void operator()(const ast::Levels& levels) { take_once(session, result.levels, levels, "levels"); }
  void operator()(const ast::Scan& scan) { take_once(session, result.scan, scan, "scan"); }
  void operator()(const ast::Tolerance& tolerance) { take_once(session, result.tolerance, tolerance, "tolerance"); }
  void operator()(const ast::Observe& observe) { result.observes.push_back(&observe); }
  void operator()(const ast::Sweep& sweep) { result.sweeps.push_back(&sweep); }
  void operator()(const ast::Expect& expect) { result.expects.push_back(&expect); }
  void operator()(const ast::Draws& draws) {
    if (draws.kind == ast::DrawKind::trajectories) take_once(session, result.trajectories, draws, "trajectories");
    else refuse(session, draws.span, draws.kind == ast::DrawKind::ensemble ? "ensemble" : "freeze", "`sweep` over values of your own");
  }
  void operator()(const ast::Data& data) { refuse(session, data.span, "data", "`sweep` and `expect`"); }
  void operator()(const ast::Compare& compare) { refuse(session, compare.span, "compare", "`sweep` and `expect`"); }
  void operator()(const ast::Fit& fit) { refuse(session, fit.span, "fit", "`sweep` and `expect`"); }
};

/// The experiment's chip, unrolled into the instance.
void elaborate_chip_use(Session& session, const Scope& scope, const ast::ChipUse& use, Unrolled& unrolled, Instance& instance) {
  const auto chip = resolve_callable(session, scope, use.chip, {CallableKind::chip}, "a chip");
  if (!chip) return;
  instance.chip = callable_name(*chip);
  unroll_chip(session, *chip, "", unrolled, use.chip.span);
  instance.qubits = unrolled.qubits;
}

void finish_chip(const Unrolled& unrolled, Instance& instance) {
  const auto qubits = static_cast<std::uint32_t>(unrolled.qubits.size());
  instance.energy = unrolled.energy;
  instance.noise = unrolled.noise;
  instance.jumps = unrolled.jumps;
  instance.baths = unrolled.baths;
  instance.correlations = unrolled.correlations;
  for (EnergyTerm& term : instance.energy) term.op = most_significant_first(std::move(term.op), qubits);
  for (NoiseTerm& term : instance.noise) term.op = most_significant_first(std::move(term.op), qubits);
  for (JumpTerm& term : instance.jumps) term.op = most_significant_first(std::move(term.op), qubits);
}

void elaborate_tolerance(Session& session, const Scope& scope, const ast::Tolerance& tolerance, Instance& instance) {
  const auto value = evaluate_constant(session, scope, tolerance.value, kNumber);
  if (!value) return;
  if (*value > 0 && *value < 1) {
    instance.tolerance = *value;
    return;
  }
  session.report(span_of(session, scope, tolerance.value), diag::tolerance_range, *value);
}

Scope experiment_scope(Session& session, const Statements& statements, const Site& site) {
  Scope scope{nullptr, 0, &site, {}};
  for (const ast::Let* let : statements.lets) declare_let(session, scope, *let);
  return scope;
}

const ast::Experiment& experiment_of(const Program& program, std::uint32_t experiment) {
  return std::get<ast::Experiment>(program.ast(0).items[program.experiments[experiment].item]);
}

Instance elaborate(Session& session, const Statements& statements, const ProgramExperiment& experiment) {
  Instance instance;
  instance.experiment = experiment.name;
  instance.span = experiment.span;
  Unrolled unrolled;
  const ChipFrame frame{"", &unrolled, {}};
  Site site{.where = "in an experiment"};
  site.operators = true;
  site.chip = &frame;
  Scope scope = experiment_scope(session, statements, site);
  elaborate_chip_use(session, scope, *statements.chip, unrolled, instance);
  for (const ast::Let* let : statements.lets) look_up(session, scope, let->name);
  if (unrolled.qubits.empty() && session.diagnostics.has_errors()) return instance;
  finish_chip(unrolled, instance);
  if (statements.begin != nullptr) elaborate_begin(session, scope, *statements.begin, instance);
  if (statements.pace != nullptr) elaborate_pace(session, scope, *statements.pace, instance);
  if (statements.scan != nullptr) instance.scan = elaborate_scan(session, scope, *statements.scan);
  if (statements.equation != nullptr) elaborate_equation(session, scope, *statements.equation, instance);
  if (statements.levels != nullptr) elaborate_levels(session, scope, *statements.levels, instance);
  if (statements.trajectories != nullptr) elaborate_trajectories(session, scope, *statements.trajectories, instance);
  if (statements.tolerance != nullptr) elaborate_tolerance(session, scope, *statements.tolerance, instance);
  Readings readings{&unrolled, &instance};
  readings.scans = statements.scan != nullptr;
  readings.pace_broken = statements.pace != nullptr && statements.pace->pieces.size() != instance.pace.size();
  elaborate_observables(session, scope, statements, readings, instance);
  elaborate_claims(session, scope, statements, readings, instance);
  check_whole(session, statements, readings, instance);
  return instance;
}

/// Rows of Instance::parameters for the axes; a swept parameter that changes nothing is an error.
void attach_axes(Session& session, const std::vector<SweptAxis>& axes, Instance& instance) {
  const auto live = live_parameters(instance);
  for (const SweptAxis& axis : axes) {
    AxisI made;
    for (const SweptColumn& column : axis) {
      const ProgramParameter& parameter = session.program.parameters[column.parameter];
      AxisColumnI one{parameter.name, std::nullopt, parameter.unit, column.values, column.span};
      const auto row = session.parameter_rows.find(column.parameter);
      if (row != session.parameter_rows.end()) one.index = row->second;
      const bool used = parameter.count ? session.counts_used.contains(parameter.name)
                                        : one.index && std::binary_search(live.begin(), live.end(), *one.index);
      if (!used && !session.diagnostics.has_errors()) session.report(column.span, diag::changes_nothing, parameter.name).note(parameter.span, "declared here");
      made.columns.push_back(std::move(one));
    }
    instance.axes.push_back(std::move(made));
  }
}

void report_missing_values(Session& session, const Instance& instance) {
  for (const ParameterUse& use : session.parameters) {
    if (std::isnan(use.value)) session.report(instance.span, diag::no_value, use.name).note(use.span, "declared here");
  }
}

/// Values of the swept counts at a grid index; the last axis is the fastest.
Overrides counts_at(const Program& program, const std::vector<SweptAxis>& axes, std::uint64_t point) {
  Overrides values;
  for (auto axis = axes.rbegin(); axis != axes.rend(); ++axis) {
    const std::uint64_t size = axis->front().values.size();
    for (const SweptColumn& column : *axis) {
      const ProgramParameter& parameter = program.parameters[column.parameter];
      if (parameter.count) values[parameter.name] = column.values[point % size];
    }
    point /= size;
  }
  return values;
}

/// A swept parameter without default takes its first value where one point must stand for all.
Overrides values_without_default(const Program& program, const std::vector<SweptAxis>& axes) {
  Overrides values;
  for (const SweptAxis& axis : axes) {
    for (const SweptColumn& column : axis) {
      const ProgramParameter& parameter = program.parameters[column.parameter];
      if (!parameter.value) values[parameter.name] = column.values.front();
    }
  }
  return values;
}

/// Grid points that share their counts.
struct PointGroup {
  Overrides counts;
  std::vector<std::uint64_t> points;
};

/// In the order of their first points; nothing if the grid is too large.
std::optional<std::vector<PointGroup>> group_points(Session& session, const std::vector<SweptAxis>& axes,
                                                    const Statements& statements) {
  std::uint64_t points = 1;
  for (const SweptAxis& axis : axes) {
    points *= axis.front().values.size();
    if (points <= kMaxPoints) continue;
    session.report(statements.sweeps.front()->span, diag::grid_too_large, kMaxPoints);
    return std::nullopt;
  }
  std::map<Overrides, std::size_t> rows;
  std::vector<PointGroup> groups;
  for (std::uint64_t point = 0; point < points; ++point) {
    Overrides counts = counts_at(session.program, axes, point);
    const auto [row, is_new] = rows.try_emplace(counts, groups.size());
    if (is_new) groups.push_back({std::move(counts), {}});
    groups[row->second].points.push_back(point);
    if (groups.size() <= kMaxInstances) continue;
    session.report(statements.sweeps.front()->span, diag::grid_too_large, kMaxInstances);
    return std::nullopt;
  }
  return groups;
}

Instance elaborate_group(const Program& program, std::uint32_t experiment, const Statements& statements,
                         const std::vector<SweptAxis>& axes, const PointGroup& group, const Overrides& values,
                         bool trial, std::uint64_t& steps, Diagnostics& diagnostics) {
  Graph graph;
  Session session{program, graph, diagnostics, values};
  session.resume(steps);
  session.trial = trial;
  Instance instance = elaborate(session, statements, program.experiments[experiment]);
  instance.graph = graph;
  attach_axes(session, axes, instance);
  check_baths(session, instance);
  if (!session.exhausted && !trial) report_missing_values(session, instance);
  instance.parameters = session.parameters;
  instance.points = group.points;
  instance.remarks = session.remarks;
  instance.counts.assign(session.counts_used.begin(), session.counts_used.end());
  steps = session.steps;
  return instance;
}

}  // namespace

Statements sort_statements(Session& session, const ast::Experiment& experiment) {
  Sorter sorter{session};
  for (const ast::Statement& statement : experiment.statements) std::visit(sorter, statement);
  if (sorter.result.chip == nullptr) session.report(experiment.name.span, diag::statement_missing, "chip");
  return sorter.result;
}

std::vector<Instance> elaborate_experiment(const Program& program, std::uint32_t experiment, const Overrides& overrides,
                                           bool trial, std::uint64_t& steps, Diagnostics& diagnostics) {
  const std::size_t errors = diagnostics.error_count();
  Graph scratch;
  Session reading{program, scratch, diagnostics, overrides};
  reading.resume(steps);
  reading.constants_only = true;
  const Statements statements = sort_statements(reading, experiment_of(program, experiment));
  const Site site{.where = "in an experiment"};
  const Scope scope = experiment_scope(reading, statements, site);
  const auto axes = elaborate_sweeps(reading, scope, statements);
  steps = reading.steps;
  const auto groups = statements.chip == nullptr ? std::nullopt : group_points(reading, axes, statements);
  std::vector<Instance> result;
  if (!groups) return result;
  for (const PointGroup& group : *groups) {
    Overrides values = values_without_default(program, axes);
    values.insert(overrides.begin(), overrides.end());
    for (const auto& [name, value] : group.counts) values.insert_or_assign(name, value);
    result.push_back(elaborate_group(program, experiment, statements, axes, group, values, trial, steps, diagnostics));
    if (steps > kMaxSteps) break;
  }
  if (diagnostics.error_count() != errors) result.clear();
  return result;
}

}  // namespace tarn
