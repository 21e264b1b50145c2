#include <algorithm>

#include "lang/check/experiment.h"
#include "lang/check/expression.h"
#include "lang/check/samples.h"
#include "lang/check/timeline.h"

namespace tarn {
namespace {

/// True if the pace moves or holds: there is something to run.
bool runs(const Instance& instance) {
  return std::any_of(instance.pace.begin(), instance.pace.end(),
                     [](const PacePieceI& piece) { return !std::holds_alternative<PaceStartI>(piece); });
}

constexpr std::uint32_t kMostSamples = 1'000'000;

/// When an observable is read, by its kind; s and t of `at` are checked.
std::optional<MomentI> moment_of(Session& session, const Scope& scope, const ast::Observe& observe) {
  if (std::holds_alternative<ast::AtEnd>(observe.when)) return AtEndI{};
  if (const auto* along = std::get_if<ast::Along>(&observe.when)) {
    const auto count = evaluate_count(session, scope, along->count);
    if (!count) return std::nullopt;
    const Span span = span_of(session, scope, along->count);
    if (*count > kMostSamples) {
      session.report(span, diag::too_many_samples, kMostSamples);
      return std::nullopt;
    }
    if (*count >= 2) return AlongI{static_cast<std::uint32_t>(*count)};
    session.report(span, diag::count_too_small, "the number of points along the pace", 2);
    return std::nullopt;
  }
  const auto* point = std::get_if<ast::AtPoint>(&observe.when);
  if (point == nullptr) return StaticI{};
  const bool at_t = point->variable.text == "t";
  if (!at_t && point->variable.text != "s") {
    session.report(point->variable.span, diag::moment_variable, point->variable.text);
    return std::nullopt;
  }
  const auto value = evaluate_quantity(session, scope, point->value, at_t ? kTime : kNumber);
  if (!value) return std::nullopt;
  const auto number = value_at_defaults(session, *value);
  const Span span = span_of(session, scope, point->value);
  if (at_t) {
    if (number && !(*number >= 0)) session.report(span, diag::below_zero, "the time", format_quantity(*number, kTime));
    if (point->meeting != ast::Meeting::unsaid) session.report(observe.span, diag::moment_meeting);
    return AtTimeI{*value};
  }
  if (number && !(*number >= 0 && *number <= 1)) session.report(span, diag::pace_outside, *number);
  return AtSI{*value, point->meeting == ast::Meeting::last};
}

/// The moment must fit what is read and what runs.
bool moment_fits(Session& session, const ast::Observe& observe, const MomentI& moment, const Instance& instance,
                 const Dependence& reads, bool reduces_only) {
  const bool is_static = std::holds_alternative<StaticI>(moment);
  const bool moving = runs(instance) && instance.scan.empty();
  if (!is_static && !moving) {
    session.report(observe.span, diag::moment_without_pace, observe.name.text).remedy("leave out `at` and `along`");
    return false;
  }
  const bool needs = (reads.readings && !reduces_only) || reads.s || reads.t;
  if (!is_static || !moving || !needs) return true;
  session.report(observe.span, diag::moment_missing, observe.name.text).remedy("`at end`, `at t = T`, `at s = X` or `along N`");
  return false;
}

std::optional<Shown> unit_of(Session& session, const ast::Observe& observe, Dimension dimension) {
  if (!observe.unit) return shown_unit(dimension);
  if (observe.unit->unit.dimension == dimension) return Shown{observe.unit->text, observe.unit->unit.factor};
  session.report(observe.unit->span, diag::dimension_mismatch, dimension, observe.unit->unit.dimension, excerpt(session, observe.unit->span));
  return std::nullopt;
}

bool same_moment(const MomentI& a, const MomentI& b) {
  if (a.index() != b.index()) return false;
  if (const auto* along = std::get_if<AlongI>(&a)) return along->samples == std::get<AlongI>(b).samples;
  if (const auto* time = std::get_if<AtTimeI>(&a)) return time->time == std::get<AtTimeI>(b).time;
  if (const auto* at = std::get_if<AtSI>(&a)) return at->s == std::get<AtSI>(b).s && at->last == std::get<AtSI>(b).last;
  return true;
}

/// What has an error already is unknown, without further messages.
void declare_broken(const Readings& readings, Scope& scope) {
  for (const auto& [name, span] : readings.broken) {
    scope.names.insert_or_assign(name, Binding{Value{}, nullptr, false, span});
  }
}

class ObserveReader {
 public:
  ObserveReader(Session& session, const Scope& scope, Readings& readings, Instance& instance)
      : session_(session), scope_(scope), readings_(readings), instance_(instance) {}

  void read(const ast::Observe& observe) {
    const auto moment = moment_of(session_, scope_, observe);
    if (observe.name.text == "distribution" && !observe.value) {
      if (moment) read_distribution(observe, *moment);
      return;
    }
    if (!check_name(observe)) return;
    if (moment && !readings_.pace_broken && runs(instance_)) check_moment(session_, observe, moment_span(observe), *moment, instance_);
    if (!moment || !read_named(observe, *moment)) readings_.broken.emplace(observe.name.text, observe.name.span);
  }

 private:
  /// `s = 0.3`
  Span moment_span(const ast::Observe& observe) const {
    const auto* point = std::get_if<ast::AtPoint>(&observe.when);
    return point == nullptr ? observe.span : cover(point->variable.span, span_of(session_, scope_, point->value));
  }

  bool read_named(const ast::Observe& observe, const MomentI& moment) {
    readings_.reduces = false;
    const std::size_t before = instance_.readings.size();
    const auto value = evaluate_value(observe, moment);
    if (!value) return false;
    const Dimension dimension = session_.graph[*value].dimension;
    const auto unit = unit_of(session_, observe, dimension);
    const Dependence reads = dependence(session_.graph, *value);
    const bool reduces_only = std::all_of(instance_.readings.begin() + static_cast<std::ptrdiff_t>(before), instance_.readings.end(),
                                          [](const ReadingI& reading) { return std::holds_alternative<ReduceI>(reading); });
    const bool reduces = readings_.reduces && reduces_only;
    const bool fits = readings_.pace_broken || moment_fits(session_, observe, moment, instance_, reads, reduces);
    if (!unit || !fits) return false;
    readings_.by_name.emplace(observe.name.text, static_cast<std::uint32_t>(instance_.observables.size()));
    instance_.observables.push_back({observe.name.text, *unit, moment, *value, observe.name.span});
    return true;
  }

  void read_distribution(const ast::Observe& observe, const MomentI& moment) {
    if (!std::holds_alternative<AtEndI>(moment) || observe.unit) {
      session_.report(observe.span, diag::distribution_form);
      readings_.broken.emplace(observe.name.text, observe.name.span);
      return;
    }
    if (!runs(instance_) || !instance_.scan.empty()) {
      session_.report(observe.span, diag::moment_without_pace, "distribution")
          .remedy(instance_.scan.empty() ? "the distribution needs a pace: `pace hold for 1 ns` keeps the place" : "");
      readings_.broken.emplace(observe.name.text, observe.name.span);
      return;
    }
    readings_.reads_state = true;
    instance_.distribution_at_end = true;
  }

  bool check_name(const ast::Observe& observe) {
    const bool itself = !observe.value;
    if (itself ? !is_reading_word(observe.name.text) : !check_declarable(session_, observe.name)) {
      if (itself) session_.report(observe.name.span, diag::unknown_observable, observe.name.text);
      return false;
    }
    const auto before = readings_.by_name.find(observe.name.text);
    const auto local = scope_.names.find(observe.name.text);
    const bool taken = before != readings_.by_name.end() || local != scope_.names.end();
    if (!taken) return true;
    const Span first = local != scope_.names.end() ? local->second.span : instance_.observables[before->second].span;
    session_.report(observe.name.span, diag::duplicate_name, observe.name.text).note(first, "first declared here");
    return false;
  }

  std::optional<NodeId> evaluate_value(const ast::Observe& observe, const MomentI& moment) {
    Site site = *scope_.site;
    site.where = "in `observe`";
    site.s = session_.graph.add({.op = NodeOp::s});
    if (instance_.scan.empty()) site.t = session_.graph.add({.op = NodeOp::t, .dimension = kTime});
    site.readings = &readings_;
    Scope inner{&scope_, scope_.module, &site, {}};
    for (const auto& [name, row] : readings_.by_name) {
      const ObservableI& earlier = instance_.observables[row];
      if (!same_moment(earlier.moment, moment)) continue;
      inner.names.insert_or_assign(name, Binding{observed_value(session_.graph, readings_, earlier.value, earlier.value), nullptr, false, earlier.span});
    }
    declare_broken(readings_, inner);
    if (observe.value) return to_observed(evaluate(session_, inner, *observe.value), span_of(session_, inner, *observe.value));
    const ast::Path path{observe.name.span, {{observe.name, std::nullopt}}, false, {}};
    return to_observed(evaluate_reading(session_, inner, path), observe.name.span);
  }

  std::optional<NodeId> to_observed(const Value& value, Span span) {
    if (const auto* verdict = value.get<VerdictValue>()) return verdict->node;
    if (!value.get<OperatorValue>()) return to_number(session_, value, span);
    session_.report(span, diag::wrong_kind, "a number", describe(value)).remedy(fmt::format("`mean({})`", excerpt(session_, span)));
    return std::nullopt;
  }

  Session& session_;
  const Scope& scope_;
  Readings& readings_;
  Instance& instance_;
};

/// True if the observable has a value at each s of a scan or each t of a trace.
bool has_many(const Session& session, const Instance& instance, const ObservableI& observable) {
  if (std::holds_alternative<AlongI>(observable.moment)) return true;
  if (instance.scan.empty()) return false;
  const Dependence reads = dependence(session.graph, observable.value);
  if (reads.s || !reads.readings) return true;
  const Sampler needed(session.graph, {observable.value});
  return std::any_of(needed.rows().begin(), needed.rows().end(), [&](std::uint32_t row) {
    const Node& node = session.graph.nodes[row];
    return node.op == NodeOp::reading && !std::holds_alternative<ReduceI>(instance.readings[node.index]);
  });
}

bool reads_many(const Session& session, const Instance& instance, NodeId claim) {
  const Sampler needed(session.graph, {claim});
  return std::any_of(needed.rows().begin(), needed.rows().end(), [&](std::uint32_t row) {
    const Node& node = session.graph.nodes[row];
    if (node.op == NodeOp::under) return has_many(session, instance, instance.observables[instance.under[node.index].observable]);
    return node.op == NodeOp::observable && has_many(session, instance, instance.observables[node.index]);
  });
}

/// `lowest(gap) > 1 MHz where s > 0.5` would still take the lowest of all.
void check_condition(Session& session, const Scope& scope, const ast::Expect& expect, NodeId holds, NodeId where,
                     const Instance& instance) {
  const Dependence condition = dependence(session.graph, where);
  const bool picks = condition.s || condition.t || reads_many(session, instance, where);
  if (!picks || reads_many(session, instance, holds)) return;
  session.report(span_of(session, scope, *expect.where), diag::where_of_one_value, excerpt(session, span_of(session, scope, expect.claim)))
      .remedy("claim each point, as in `expect gap > 1 MHz where s > 0.5`");
}

}  // namespace

Shown shown_unit(Dimension dimension) {
  const NamedUnit unit = default_unit(dimension);
  return {unit.text, unit.unit.factor};
}

void elaborate_observables(Session& session, Scope& scope, const Statements& statements, Readings& readings, Instance& instance) {
  readings.moves = runs(instance) && instance.scan.empty();
  ObserveReader reader(session, scope, readings, instance);
  for (const ast::Observe* observe : statements.observes) reader.read(*observe);
}

void elaborate_claims(Session& session, Scope& scope, const Statements& statements, Readings& readings, Instance& instance) {
  readings.claims = true;
  Site site = *scope.site;
  site.where = "in `expect`";
  site.s = session.graph.add({.op = NodeOp::s});
  site.t = session.graph.add({.op = NodeOp::t, .dimension = kTime});
  site.readings = &readings;
  Scope inner{&scope, scope.module, &site, {}};
  for (const auto& [name, row] : readings.by_name) {
    const ObservableI& observable = instance.observables[row];
    const Dimension dimension = session.graph[observable.value].dimension;
    const NodeId node = session.graph.add({.op = NodeOp::observable, .index = row, .dimension = dimension, .span = observable.span});
    const Value value = observed_value(session.graph, readings, observable.value, node);
    inner.names.insert_or_assign(name, Binding{value, nullptr, false, observable.span});
  }
  declare_broken(readings, inner);
  for (const ast::Expect* expect : statements.expects) {
    const auto holds = evaluate_truth(session, inner, expect->claim);
    const auto where = expect->where ? evaluate_truth(session, inner, *expect->where) : std::nullopt;
    if (!holds || (expect->where && !where)) continue;
    if (where) check_condition(session, inner, *expect, *holds, *where, instance);
    if (!dependence(session.graph, *holds).observables) {
      session.report(span_of(session, inner, expect->claim), diag::claim_without_observable);
    }
    instance.claims.push_back({std::string(session.text(expect->span)), *holds, where, expect->span});
  }
}

}  // namespace tarn
