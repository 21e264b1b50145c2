#include <algorithm>
#include <cmath>
#include <set>

#include "lang/check/experiment.h"
#include "lang/check/samples.h"

namespace tarn {
namespace {

bool moves(const Instance& instance) {
  return std::any_of(instance.pace.begin(), instance.pace.end(),
                     [](const PacePieceI& piece) { return !std::holds_alternative<PaceStartI>(piece); });
}

bool begins_steady(const Instance& instance) { return instance.begin && std::holds_alternative<BeginSteadyI>(*instance.begin); }

/// Statements about a state that no observable reads, or that does not change.
void check_use(Session& session, const Statements& statements, const Readings& readings, const Instance& instance) {
  constexpr std::string_view kUnread = "no observable reads a state";
  const bool unread = !readings.reads_state;
  if (unread && statements.begin != nullptr) session.report(statements.begin->span, diag::unused_statement, "begin", kUnread);
  if (statements.equation == nullptr || readings.reads_generator) return;
  if (!unread && (readings.pace_broken || moves(instance) || begins_steady(instance))) return;
  session.report(statements.equation->span, diag::unused_statement, "equation", unread ? kUnread : "there is no pace, so nothing moves");
}

void check_statements(Session& session, const Statements& statements, const Readings& readings, const Instance& instance) {
  const Span span = instance.span;
  const bool scan = statements.scan != nullptr;
  const bool idle = scan && statements.equation != nullptr && !readings.reads_generator;
  if (scan && statements.pace != nullptr) session.report(statements.pace->span, diag::not_in_scan, "pace");
  if (scan && statements.begin != nullptr) session.report(statements.begin->span, diag::not_in_scan, "begin");
  if (idle && readings.broken.empty()) session.report(statements.equation->span, diag::not_in_scan, "equation");
  if (scan && readings.reads_state) session.report(statements.scan->span, diag::state_in_scan);
  if (!scan && readings.reads_state && statements.begin == nullptr) session.report(span, diag::statement_missing, "begin").remedy("`begin ground`");
  const bool runs = (moves(instance) || begins_steady(instance)) && readings.reads_state && !scan;
  if ((runs || readings.reads_generator) && statements.equation == nullptr) {
    session.report(span, diag::statement_missing, "equation")
        .remedy(readings.reads_generator || begins_steady(instance) ? "`equation davies`" : "`equation schroedinger`");
  }
  if (statements.observes.empty()) session.report(span, diag::nothing_observed);
  else if (!scan && readings.broken.empty()) check_use(session, statements, readings, instance);
}

/// `begin thermal` takes the temperature that all baths share.
void check_thermal(Session& session, const Statements& statements, const Instance& instance) {
  const auto* thermal = instance.begin ? std::get_if<BeginThermalI>(&*instance.begin) : nullptr;
  if (thermal == nullptr || thermal->temperature) return;
  std::set<double> temperatures;
  for (const InstanceBath& bath : instance.baths) {
    temperatures.insert(value_at_defaults(session, bath.temperature).value_or(0));
  }
  // A bath that could not be read was reported.
  if (temperatures.size() == 1 || (temperatures.empty() && session.diagnostics.has_errors())) return;
  session.report(statements.begin->span, diag::thermal_temperature, temperatures.size()).remedy("`thermal(15 mK)` gives it");
}

/// H at s = 1 without offsets and terms in t: the sum of coefficients of each word.
std::optional<std::map<Word, double>> final_words(Session& session, const Instance& instance) {
  std::vector<NodeId> roots;
  for (const EnergyTerm& term : instance.energy) {
    for (const OperatorTerm& part : term.op) {
      if (!is_known(session, part.coefficient)) return std::nullopt;
      roots.push_back(part.coefficient);
    }
  }
  Sampler sampler(session.graph, roots);
  Bindings bindings;
  for (const ParameterUse& use : session.parameters) bindings.parameters.push_back(use.value);
  bindings.s = 1;
  bindings.offsets_on = 0;
  sampler.run(bindings);
  std::map<NodeId, bool> driven;
  std::map<Word, double> words;
  for (const EnergyTerm& term : instance.energy) {
    for (const OperatorTerm& part : term.op) {
      const auto [at, is_new] = driven.try_emplace(part.coefficient, false);
      if (is_new) at->second = dependence(session.graph, part.coefficient).t;
      if (!at->second) words[part.word] += part.factor.real() * sampler.value(part.coefficient);
    }
  }
  return words;
}

/// Words of Z are orthogonal functions of the bits, so their sum is constant only if all vanish.
void check_target(Session& session, const Instance& instance, Span span) {
  const auto words = final_words(session, instance);
  if (!words) return;
  double diagonal = 0;
  double other = 0;
  for (const auto& [word, value] : *words) {
    if (word.x != 0) other = std::max(other, std::abs(value));
    if (word.x == 0 && word.z != 0) diagonal = std::max(diagonal, std::abs(value));
  }
  if (diagonal <= 1e-12 * other || diagonal == 0) {
    // After an error the terms that are missing here may be those that could not be read.
    if (!session.diagnostics.has_errors()) session.report(span, diag::target_constant);
    return;
  }
  if (other <= 1e-12 * diagonal) return;
  session.report(span, diag::target_not_diagonal);
}

void check_targets(Session& session, const Statements& statements, const Instance& instance) {
  for (const ReadingI& reading : instance.readings) {
    const auto* population = std::get_if<PopulationI>(&reading);
    if (population == nullptr || population->set.kind != SetKind::target) continue;
    for (const ast::Observe* observe : statements.observes) {
      if (session.text(observe->span).find("target") == std::string_view::npos) continue;
      check_target(session, instance, observe->span);
      return;
    }
  }
}

void check_coefficients(Session& session, const Instance& instance) {
  std::vector<NodeId> nodes;
  const auto collect = [&](const Operator& op) {
    for (const OperatorTerm& term : op) nodes.push_back(term.coefficient);
  };
  for (const EnergyTerm& term : instance.energy) collect(term.op);
  for (const NoiseTerm& term : instance.noise) collect(term.op);
  for (const JumpTerm& term : instance.jumps) collect(term.op);
  report_not_finite_in_s(session, nodes);
}

void collect_terms(const Operator& op, std::vector<NodeId>& roots) {
  for (const OperatorTerm& term : op) roots.push_back(term.coefficient);
}

void collect_pace(const Instance& instance, std::vector<NodeId>& roots) {
  for (const PacePieceI& piece : instance.pace) {
    if (const auto* start = std::get_if<PaceStartI>(&piece)) roots.push_back(start->s);
    if (const auto* hold = std::get_if<PaceHoldI>(&piece)) roots.push_back(hold->time);
    if (const auto* step = std::get_if<PaceStepI>(&piece)) roots.push_back(step->to);
    if (const auto* ramp = std::get_if<PaceRampI>(&piece)) {
      roots.push_back(ramp->to);
      roots.push_back(ramp->over);
    }
  }
}

void collect_begin(const Instance& instance, std::vector<NodeId>& roots) {
  if (!instance.begin) return;
  if (const auto* thermal = std::get_if<BeginThermalI>(&*instance.begin)) {
    if (thermal->temperature) roots.push_back(*thermal->temperature);
    for (const InstanceBath& bath : instance.baths) {
      if (!thermal->temperature) roots.push_back(bath.temperature);
    }
  }
  if (const auto* populations = std::get_if<BeginPopulationsI>(&*instance.begin)) {
    roots.insert(roots.end(), populations->weights.begin(), populations->weights.end());
  }
}

void collect_answers(const Instance& instance, std::vector<NodeId>& roots) {
  for (const ObservableI& observable : instance.observables) {
    roots.push_back(observable.value);
    if (const auto* time = std::get_if<AtTimeI>(&observable.moment)) roots.push_back(time->time);
    if (const auto* at = std::get_if<AtSI>(&observable.moment)) roots.push_back(at->s);
  }
  for (const ReadingI& reading : instance.readings) {
    if (const auto* mean = std::get_if<MeanI>(&reading)) collect_terms(mean->op, roots);
    const auto* population = std::get_if<PopulationI>(&reading);
    if (population != nullptr && population->set.within) roots.push_back(*population->set.within);
  }
  for (const ClaimI& claim : instance.claims) {
    roots.push_back(claim.holds);
    if (claim.where) roots.push_back(*claim.where);
  }
}

}  // namespace

void check_whole(Session& session, const Statements& statements, const Readings& readings, Instance& instance) {
  if (instance.qubits.empty()) {
    session.report(statements.chip->span, diag::empty_chip, instance.chip);
    return;
  }
  check_statements(session, statements, readings, instance);
  check_thermal(session, statements, instance);
  check_targets(session, statements, instance);
  check_coefficients(session, instance);
  check_equations(session, statements, readings, instance);
}

std::vector<std::uint32_t> live_parameters(const Instance& instance) {
  std::vector<NodeId> roots;
  for (const EnergyTerm& term : instance.energy) collect_terms(term.op, roots);
  if (any_equation(instance, takes_jumps)) {
    for (const JumpTerm& term : instance.jumps) collect_terms(term.op, roots);
  }
  if (any_equation(instance, takes_noise)) {
    for (const NoiseTerm& term : instance.noise) {
      collect_terms(term.op, roots);
      roots.push_back(instance.baths[term.bath].density);
      roots.push_back(instance.baths[term.bath].temperature);
    }
    for (const CorrelationI& correlation : instance.correlations) {
      roots.insert(roots.end(), correlation.elements.begin(), correlation.elements.end());
    }
  }
  for (const EquationI& equation : instance.equations) {
    if (equation.window) roots.push_back(*equation.window);
  }
  for (const InstanceQubit& qubit : instance.qubits) {
    if (qubit.offset) roots.push_back(*qubit.offset);
  }
  collect_pace(instance, roots);
  collect_begin(instance, roots);
  collect_answers(instance, roots);
  std::vector<std::uint32_t> live;
  const Sampler needed(instance.graph, roots);
  for (const std::uint32_t row : needed.rows()) {
    if (instance.graph.nodes[row].op == NodeOp::parameter) live.push_back(instance.graph.nodes[row].index);
  }
  std::sort(live.begin(), live.end());
  return live;
}

}  // namespace tarn
