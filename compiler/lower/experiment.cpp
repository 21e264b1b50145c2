#include "compiler/lower/experiment.h"

#include <algorithm>

#include "lang/support/match.h"
#include "compiler/lower/claims.h"

namespace tarn::compiler {
namespace {

runtime::DisplayUnit unit(const Shown& shown) { return {shown.label, shown.factor}; }

runtime::Begin lower_begin(const BeginI& begin, const ExperimentRows& rows) {
  return std::visit(
      Match{[](const BeginGroundI&) -> runtime::Begin { return runtime::BeginGround{}; },
            [&](const BeginThermalI& thermal) -> runtime::Begin {
              if (!thermal.temperature) return runtime::BeginThermal{};
              return runtime::BeginThermal{rows.setting(*thermal.temperature)};
            },
            [](const BeginPlusI&) -> runtime::Begin { return runtime::BeginPlus{}; },
            [](const BeginSteadyI&) -> runtime::Begin { return runtime::BeginSteady{}; },
            [](const BeginStateI& state) -> runtime::Begin { return runtime::BeginState{state.letters}; },
            [&](const BeginPopulationsI& populations) -> runtime::Begin {
              runtime::BeginPopulations result;
              for (const NodeId weight : populations.weights) result.weights.push_back(rows.setting(weight));
              return result;
            }},
      begin);
}

runtime::PacePiece lower_piece(const PacePieceI& piece, const SourceSet& sources, const ExperimentRows& rows) {
  return std::visit(
      Match{[&](const PaceStartI& p) -> runtime::PacePiece { return runtime::PaceStart{rows.setting(p.s)}; },
            [&](const PaceRampI& p) -> runtime::PacePiece {
              return runtime::PaceRamp{rows.setting(p.to), rows.setting(p.over)};
            },
            [&](const PaceHoldI& p) -> runtime::PacePiece { return runtime::PaceHold{rows.setting(p.time)}; },
            [&](const PaceStepI& p) -> runtime::PacePiece { return runtime::PaceStep{rows.setting(p.to)}; },
            [&](const PaceFollowI& p) -> runtime::PacePiece {
              return runtime::PaceFollow{p.t, p.s, sources.place(p.span)};
            }},
      piece);
}

runtime::StateSet lower_set(const StateSetI& set, const ExperimentRows& rows) {
  runtime::StateSet result{static_cast<runtime::StateSetKind>(set.kind), set.level, set.letters, {}};
  if (set.within) result.within = rows.setting(*set.within);
  return result;
}

runtime::Reading lower_reading(const ReadingI& reading, const ExperimentRows& rows) {
  return std::visit(
      Match{[&](const PopulationI& r) -> runtime::Reading { return runtime::ReadPopulation{lower_set(r.set, rows)}; },
            [&](const MeanI& r) -> runtime::Reading { return runtime::ReadMean{rows.sum(r.op)}; },
            [](const MeanEnergyI&) -> runtime::Reading { return runtime::ReadMeanEnergy{}; },
            [](const LevelI& r) -> runtime::Reading { return runtime::ReadLevel{r.level}; },
            [](const GapI&) -> runtime::Reading { return runtime::ReadGap{}; },
            [](const PurityI&) -> runtime::Reading { return runtime::ReadPurity{}; },
            [](const CoherenceI& r) -> runtime::Reading { return runtime::ReadCoherence{r.row, r.column}; },
            [](const FidelityI& r) -> runtime::Reading { return runtime::ReadFidelity{r.letters}; },
            [](const RelaxationI&) -> runtime::Reading { return runtime::ReadRelaxation{}; },
            [](const DephasingI& r) -> runtime::Reading { return runtime::ReadDephasing{r.row, r.column}; },
            [](const VerdictI&) -> runtime::Reading { return runtime::ReadVerdict{}; },
            [](const ReduceI& r) -> runtime::Reading {
              return runtime::ReadReduction{static_cast<runtime::Over>(r.over), r.observable};
            }},
      reading);
}

runtime::Moment lower_moment(const MomentI& moment, const ExperimentRows& rows) {
  return std::visit(
      Match{[](const AtEndI&) -> runtime::Moment { return runtime::AtEnd{}; },
            [&](const AtTimeI& at) -> runtime::Moment { return runtime::AtTime{rows.setting(at.time)}; },
            [&](const AtSI& at) -> runtime::Moment { return runtime::AtS{rows.setting(at.s), at.last}; },
            [](const AlongI& along) -> runtime::Moment { return runtime::Along{along.samples}; },
            [](const StaticI&) -> runtime::Moment { return runtime::Static{}; }},
      moment);
}

/// Rows of readings, or of observables, that a node reads.
std::vector<std::uint32_t> reads(const Graph& graph, NodeId root, NodeOp op) {
  std::vector<bool> seen(graph.nodes.size(), false);
  std::vector<std::uint32_t> found;
  seen[root.row] = true;
  for (std::size_t i = root.row + 1; i-- > 0;) {
    if (!seen[i]) continue;
    const Node& node = graph.nodes[i];
    if (node.op == op) found.push_back(node.index);
    if (node.op < NodeOp::table) continue;
    for (const NodeId operand : {node.a, node.b, node.c}) {
      if (operand.row < i) seen[operand.row] = true;
    }
  }
  return found;
}

runtime::Scale display_scale(const Dimension& dimension) {
  if (dimension.is_number()) return runtime::Scale::plain;
  if (dimension == kFrequency || dimension == kEnergy) return runtime::Scale::energy;
  return dimension == kRate ? runtime::Scale::rate : runtime::Scale::answer;
}

runtime::Observable lower_observable(const ObservableI& observable, const Instance& instance,
                                     const SourceSet& sources, const ExperimentRows& rows) {
  runtime::Observable result;
  result.name = observable.name;
  result.shown = observable.shown;
  result.unit = unit(observable.unit);
  result.moment = lower_moment(observable.moment, rows);
  result.row = rows.row(runtime::kObservables, observable.value);
  result.readings = reads(instance.graph, observable.value, NodeOp::reading);
  result.reads_s = dependence(instance.graph, observable.value).s;
  result.scale = display_scale(instance.graph[observable.value].dimension);
  result.place = sources.place(observable.span);
  return result;
}

void add_once(std::vector<std::uint32_t>& rows, std::uint32_t row) {
  if (std::find(rows.begin(), rows.end(), row) == rows.end()) rows.push_back(row);
}

runtime::Claim lower_claim(const ClaimI& claim, const Instance& instance, const SourceSet& sources,
                           const ExperimentRows& rows) {
  runtime::Claim result;
  result.text = claim.text;
  result.holds = claim_tree(instance.graph, claim.holds, rows);
  if (claim.where) result.where = claim_tree(instance.graph, *claim.where, rows);
  bool plain = false;
  for (const NodeId side : {claim.holds, claim.where.value_or(claim.holds)}) {
    for (const std::uint32_t row : reads(instance.graph, side, NodeOp::observable)) {
      add_once(result.observables, row);
      plain = true;
    }
    for (const std::uint32_t row : reads(instance.graph, side, NodeOp::under)) {
      add_once(result.under, row);
      add_once(result.observables, instance.under[row].observable);
    }
  }
  std::sort(result.under.begin(), result.under.end());
  result.under_all = !plain && !result.under.empty();
  result.place = sources.place(claim.span);
  return result;
}

runtime::Axis lower_axis(const AxisI& axis) {
  runtime::Axis result;
  for (const AxisColumnI& column : axis.columns) {
    result.columns.push_back({column.parameter, column.index, unit(column.unit), column.values});
  }
  return result;
}

runtime::EquationChoice lower_equation(const EquationI& equation, const SourceSet& sources, const ExperimentRows& rows) {
  runtime::EquationChoice result;
  result.label = equation.label;
  result.equation = static_cast<runtime::Equation>(equation.kind);
  result.lamb_shift = equation.lamb_shift;
  result.memory = static_cast<runtime::Memory>(equation.memory);
  if (equation.window) result.window = rows.setting(*equation.window);
  result.depth = equation.depth;
  result.place = sources.place(equation.span);
  return result;
}

void lower_equations(const Instance& instance, const SourceSet& sources, const ExperimentRows& rows, runtime::Plan& plan) {
  for (const EquationI& equation : instance.equations) plan.compared.push_back(lower_equation(equation, sources, rows));
  if (!plan.compared.empty()) plan.choice = plan.compared.front();
  if (!instance.compares) plan.compared.clear();
  plan.levels = instance.levels;
  plan.levels_auto = instance.levels_auto;
  if (instance.trajectories) plan.trajectories = runtime::Trajectories{instance.trajectories->count, instance.trajectories->seed};
  for (const UnderI& under : instance.under) plan.under.push_back({under.equation, under.observable});
}

}  // namespace

runtime::Plan lower_experiment(const Instance& instance, const SourceSet& sources, const ExperimentRows& rows) {
  runtime::Plan plan;
  plan.experiment = instance.experiment;
  for (std::uint32_t i = 0; i < instance.parameters.size(); ++i) {
    const ParameterUse& use = instance.parameters[i];
    plan.parameters.push_back({use.name, i, unit(use.unit), use.value, use.lowest, use.highest, sources.place(use.span)});
  }
  if (instance.begin) plan.begin = lower_begin(*instance.begin, rows);
  for (const PacePieceI& piece : instance.pace) plan.pace.push_back(lower_piece(piece, sources, rows));
  lower_equations(instance, sources, rows, plan);
  for (const ReadingI& reading : instance.readings) plan.readings.push_back(lower_reading(reading, rows));
  for (const ObservableI& o : instance.observables) plan.observables.push_back(lower_observable(o, instance, sources, rows));
  plan.distribution_at_end = instance.distribution_at_end;
  for (const ClaimI& claim : instance.claims) plan.claims.push_back(lower_claim(claim, instance, sources, rows));
  for (const AxisI& axis : instance.axes) plan.axes.push_back(lower_axis(axis));
  plan.points = instance.points;
  if (!instance.scan.empty()) plan.scan = runtime::Scan{instance.scan};
  plan.tolerance = instance.tolerance;
  plan.remarks = instance.remarks;
  return plan;
}

std::vector<std::string> left_out(const runtime::Plan& plan) {
  const auto kind = static_cast<EquationKind>(plan.choice.equation);
  std::vector<std::string> result;
  if (kind == EquationKind::none) return result;
  if (!takes_noise(kind)) {
    for (const runtime::Coupling& coupling : plan.chip.couplings) result.push_back("noise " + coupling.what);
  }
  if (!takes_jumps(kind)) {
    for (const runtime::Jump& jump : plan.chip.jumps) result.push_back("jump " + jump.what);
  }
  return result;
}

std::vector<runtime::Plan> plan_of_each(const runtime::Plan& plan) {
  if (plan.compared.empty()) return {plan};
  std::vector<runtime::Plan> plans;
  for (const runtime::EquationChoice& choice : plan.compared) {
    plans.push_back(plan);
    plans.back().choice = choice;
    plans.back().left_out = left_out(plans.back());
  }
  return plans;
}

}  // namespace tarn::compiler
