#include "lang/check/readings.h"

#include <algorithm>
#include <array>

#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/program/operators.h"
#include "lang/support/near.h"

namespace tarn {
namespace {

constexpr std::string_view kObservables =
    "observables available: population, mean, E, gap, purity, coherence, fidelity, T1, T2, verdict, lowest, highest, final";
constexpr std::string_view kSets = "state sets available: ground, level(k), state(\"01\"), any, target";

constexpr std::array kAvailable = std::to_array<std::string_view>(
    {"population", "mean", "E", "gap", "purity", "coherence", "fidelity", "T1", "T2", "verdict", "within", "marginal",
     "outside", "lowest", "highest", "final"});
constexpr std::array kLater = std::to_array<std::string_view>({"rate", "effective_temperature", "quantile", "fraction"});
constexpr std::array kVerdicts = std::to_array<std::string_view>({"within", "marginal", "outside"});

constexpr auto kSetWords = std::to_array<std::string_view>({"ground", "level", "state", "any", "target"});

/// `00`: a number where the letters of a state stand; empty for other expressions.
std::string digits_of(const Session& session, const Scope& scope, const ast::Given& given) {
  if (!std::holds_alternative<ast::Number>(session.ast(scope).expr(given.value).node)) return {};
  const std::string text(session.text(given.span));
  return text.find_first_not_of("01") == std::string::npos ? text : std::string();
}

/// `population("11")`, `population(0)`, `lowest(2*gap)`.
void report_no_name(Session& session, const Scope& scope, const ast::Path& path) {
  const std::string& word = path.steps.front().name.text;
  const Span span = path.given.front().span;
  const std::string text = excerpt(session, span);
  const ast::ExprNode& node = session.ast(scope).expr(path.given.front().value).node;
  const bool reduces = word != "population" && word != "fidelity";
  const std::string_view expected = reduces ? "the name of an observable" : word == "population" ? "a set of states" : "a state";
  const std::string digits = digits_of(session, scope, path.given.front());
  const std::size_t qubits = scope.site->readings->unrolled->qubits.size();
  const bool letters = digits.size() >= 2 && (digits.front() == '0' || digits.size() == qubits);
  auto tail = session.report(span, diag::wrong_kind, expected, text);
  if (reduces) tail.remedy(fmt::format("`observe` it under a name and use the name: `{}(NAME)`", word));
  else if (std::holds_alternative<ast::Text>(node)) tail.remedy(fmt::format("`{}(state({}))`", word, text));
  else if (letters || (word == "fidelity" && !digits.empty())) tail.remedy(letters_remedy(word + "(state(\"{}\"))", digits, qubits));
  else if (std::holds_alternative<ast::Number>(node) && word == "population") tail.remedy(fmt::format("`population(level({}))`", text));
}

/// What there is for a word that is not yet available.
std::string instead_of(std::string_view word) {
  if (word == "rate" || word == "effective_temperature") {
    return "a trace during `hold`, as in `observe p = population(level(1)) along 201`";
  }
  return std::string(kObservables);
}

/// The one argument of a reading as it is written.
const ast::Path* only_path(Session& session, const Scope& scope, const ast::Path& path) {
  if (!path.call || path.given.size() != 1 || path.given.front().name) {
    session.report(path.span, diag::argument_count, path.steps.front().name.text, "1 argument", path.given.size());
    return nullptr;
  }
  const auto* use = std::get_if<ast::Use>(&session.ast(scope).expr(path.given.front().value).node);
  if (use == nullptr) {
    report_no_name(session, scope, path);
    return nullptr;
  }
  if (!use->held.empty()) {
    session.report(use->held.front().span, diag::not_available, "`when`", std::string(kSets));
    return nullptr;
  }
  return &use->path;
}

Value add_reading(Session& session, const Scope& scope, ReadingI reading, Dimension dimension, Span span) {
  Readings& readings = *scope.site->readings;
  std::vector<ReadingI>& rows = readings.instance->readings;
  const auto row = static_cast<std::uint32_t>(rows.size());
  rows.push_back(std::move(reading));
  return number_value(session.graph.add({.op = NodeOp::reading, .index = row, .dimension = dimension, .span = span}));
}

std::optional<std::uint32_t> level_number(Session& session, const Scope& scope, ast::ExprId id) {
  const auto level = evaluate_count(session, scope, id);
  if (!level) return std::nullopt;
  const std::size_t qubits = scope.site->readings->unrolled->qubits.size();
  const double levels = qubits < 63 ? static_cast<double>(std::uint64_t{1} << qubits) : 9e18;
  if (*level >= 0 && static_cast<double>(*level) < levels && *level < INT32_MAX) return static_cast<std::uint32_t>(*level);
  session.report(span_of(session, scope, id), diag::unknown_level, *level, levels)
      .remedy(qubits < 63 ? fmt::format("levels are {}", index_range(std::int64_t{1} << qubits)) : std::string());
  return std::nullopt;
}

std::optional<NodeId> within_of(Session& session, const Scope& scope, const ast::Path& path) {
  const ast::Given& given = path.given.front();
  const bool named = given.name && given.name->text == "within";
  if (path.given.size() == 1 && named) return evaluate_quantity(session, scope, given.value, kFrequency);
  session.report(path.span, diag::wrong_use, "ground").remedy("`ground` or `ground(within = 5 MHz)`");
  return std::nullopt;
}

std::optional<StateSetI> state_set(Session& session, const Scope& scope, const ast::Path& path) {
  const std::string& word = path.steps.front().name.text;
  const bool bare = !path.call && path.steps.size() == 1 && !path.steps.front().index;
  StateSetI set;
  if (word == "any" && bare) return set;
  if (word == "target" && bare) {
    set.kind = SetKind::target;
    return set;
  }
  if (word == "ground") {
    set.kind = SetKind::ground;
    if (path.call && !path.given.empty()) {
      set.within = within_of(session, scope, path);
      if (!set.within) return std::nullopt;
    }
    return set;
  }
  if (word == "level" && path.given.size() == 1) {
    set.kind = SetKind::level;
    const auto level = level_number(session, scope, path.given.front().value);
    if (!level) return std::nullopt;
    set.level = *level;
    return set;
  }
  if (word == "state" && path.call) {
    set.kind = SetKind::state;
    const auto letters = state_letters(session, scope, path, scope.site->readings->unrolled->qubits.size(), "01");
    if (!letters) return std::nullopt;
    set.letters = *letters;
    return set;
  }
  const std::string_view near = near_word(word, kSetWords);
  session.report(path.span, diag::unknown_state_set, excerpt(session, path.span))
      .remedy(near.empty() ? std::string(kSets) : fmt::format("did you mean `{}`?", near));
  return std::nullopt;
}

Value read_population(Session& session, const Scope& scope, const ast::Path& path) {
  const ast::Path* argument = only_path(session, scope, path);
  const auto set = argument == nullptr ? std::nullopt : state_set(session, scope, *argument);
  if (!set) return {};
  scope.site->readings->reads_state = true;
  return add_reading(session, scope, PopulationI{*set}, kNumber, path.span);
}

Value read_mean(Session& session, const Scope& scope, const ast::Path& path) {
  if (path.given.size() != 1 || path.given.front().name) {
    session.report(path.span, diag::argument_count, "mean", "1 argument", path.given.size());
    return {};
  }
  scope.site->readings->reads_state = true;
  const ast::ExprId id = path.given.front().value;
  const auto* use = std::get_if<ast::Use>(&session.ast(scope).expr(id).node);
  const bool energy = use != nullptr && use->path.steps.size() == 1 && use->path.steps.front().name.text == "H" && !use->path.call;
  if (energy) return add_reading(session, scope, MeanEnergyI{}, kFrequency, path.span);
  const Value value = evaluate(session, scope, id);
  if (value.unknown()) return {};
  const auto* op = value.get<OperatorValue>();
  const Span span = span_of(session, scope, id);
  if (op == nullptr) {
    session.report(span, diag::wrong_kind, "an operator", describe(value));
    return {};
  }
  if (!is_hermitian(op->terms)) {
    session.report(span, diag::not_hermitian, excerpt(session, span));
    return {};
  }
  const auto qubits = static_cast<std::uint32_t>(scope.site->readings->unrolled->qubits.size());
  return add_reading(session, scope, MeanI{most_significant_first(op->terms, qubits)}, op->dimension, path.span);
}

Value read_levels(Session& session, const Scope& scope, const ast::Path& path, const std::string& word) {
  const std::size_t wanted = word == "coherence" ? 2 : word == "E" ? 1 : 0;
  if (path.given.size() != wanted) {
    session.report(path.span, diag::argument_count, word, counted(wanted, "argument"), path.given.size());
    return {};
  }
  std::vector<std::uint32_t> levels;
  for (const ast::Given& given : path.given) {
    const auto level = level_number(session, scope, given.value);
    if (!level) return {};
    levels.push_back(*level);
  }
  Readings& readings = *scope.site->readings;
  (word == "E" || word == "gap" ? readings.reads_levels : readings.reads_state) = true;
  if (word == "E") return add_reading(session, scope, LevelI{levels[0]}, kFrequency, path.span);
  if (word == "gap") return add_reading(session, scope, GapI{}, kFrequency, path.span);
  if (word == "purity") return add_reading(session, scope, PurityI{}, kNumber, path.span);
  return add_reading(session, scope, CoherenceI{levels[0], levels[1]}, kNumber, path.span);
}

Value read_fidelity(Session& session, const Scope& scope, const ast::Path& path) {
  const ast::Path* argument = only_path(session, scope, path);
  if (argument == nullptr) return {};
  if (argument->steps.front().name.text != "state" || !argument->call) {
    session.report(argument->span, diag::wrong_use, "fidelity").remedy("`fidelity(state(\"01+-\"))` names a state by letters");
    return {};
  }
  const auto letters = state_letters(session, scope, *argument, scope.site->readings->unrolled->qubits.size(), "01+-");
  if (!letters) return {};
  scope.site->readings->reads_state = true;
  return add_reading(session, scope, FidelityI{*letters}, kNumber, path.span);
}

/// An observable as a claim reads it.
Value claimed(Session& session, const Readings& readings, std::uint32_t row, Span span) {
  const NodeId value = readings.instance->observables[row].value;
  const Dimension dimension = session.graph[value].dimension;
  const NodeId node = session.graph.add({.op = NodeOp::observable, .index = row, .dimension = dimension, .span = span});
  return observed_value(session.graph, readings, value, node);
}

Value made_for_claim(Session& session, Readings& readings, ObservableI observable) {
  std::vector<ObservableI>& all = readings.instance->observables;
  const Span span = observable.span;
  all.push_back(std::move(observable));
  return claimed(session, readings, static_cast<std::uint32_t>(all.size() - 1), span);
}

/// lowest(x), highest(x), final(x) of an observable with a trace or a scan.
Value read_reduction(Session& session, const Scope& scope, const ast::Path& path, const std::string& word) {
  const ast::Path* argument = only_path(session, scope, path);
  if (argument == nullptr) return {};
  Readings& readings = *scope.site->readings;
  const std::string& name = argument->steps.front().name.text;
  const auto found = readings.by_name.find(name);
  const bool plain = argument->steps.size() == 1 && !argument->call;
  if (plain && readings.broken.contains(name)) return {};
  if (found == readings.by_name.end() || !plain) {
    std::vector<std::string> known;
    for (const auto& [observed_name, row] : readings.by_name) known.push_back(observed_name);
    const std::string_view near = near_word(name, known);
    session.report(argument->span, diag::not_observed, excerpt(session, argument->span))
        .remedy(near.empty() ? fmt::format("`observe {} along 101` or a scan before it", name) : fmt::format("did you mean `{}`?", near));
    return {};
  }
  const ObservableI observed = readings.instance->observables[found->second];
  const bool trace = std::holds_alternative<AlongI>(observed.moment) || readings.scans;
  if (!trace) {
    session.report(argument->span, diag::no_trace, word, name).note(observed.span, "observed here");
    return {};
  }
  readings.reduces = true;
  const ReductionI over = word == "lowest" ? ReductionI::lowest : word == "highest" ? ReductionI::highest : ReductionI::final;
  const Dimension dimension = session.graph[observed.value].dimension;
  const Value reading = add_reading(session, scope, ReduceI{over, found->second}, dimension, path.span);
  const NodeId node = reading.get<NumberValue>()->node;
  if (!readings.claims) return observed_value(session.graph, readings, node, node);
  return made_for_claim(session, readings, {excerpt(session, path.span), observed.unit, StaticI{}, node, path.span, false});
}

/// T1, and T2 of two levels.
Value read_times(Session& session, const Scope& scope, const ast::Path& path, const std::string& word) {
  const std::size_t given = path.given.size();
  if (given != 0 && (word == "T1" || given != 2)) {
    session.report(path.span, diag::argument_count, word, word == "T1" ? "no arguments" : "no arguments or 2 levels", given);
    return {};
  }
  DephasingI levels{0, 1};
  if (given == 2) {
    const auto row = level_number(session, scope, path.given[0].value);
    const auto column = level_number(session, scope, path.given[1].value);
    if (!row || !column) return {};
    levels = {*row, *column};
  }
  if (levels.row == levels.column) {
    session.report(path.span, diag::wrong_use, "T2").remedy("`T2(0, 1)` is of two different levels");
    return {};
  }
  Readings& readings = *scope.site->readings;
  readings.reads_generator = true;
  if (!readings.relaxation) readings.relaxation = path.span;
  const ReadingI reading = word == "T1" ? ReadingI(RelaxationI{}) : ReadingI(levels);
  return add_reading(session, scope, reading, kTime, path.span);
}

/// The worst verdict so far; in a claim at the end of the pace.
Value read_verdict(Session& session, const Scope& scope, const ast::Path& path) {
  if (path.call) {
    session.report(path.span, diag::argument_count, "verdict", "no arguments", path.given.size());
    return {};
  }
  Readings& readings = *scope.site->readings;
  readings.reads_generator = true;
  const Instance& instance = *readings.instance;
  for (std::uint32_t row = 0; readings.claims && row < instance.observables.size(); ++row) {
    const ObservableI& made = instance.observables[row];
    if (!made.shown && made.name == "verdict") return claimed(session, readings, row, path.span);
  }
  const NodeId node = add_reading(session, scope, VerdictI{}, kNumber, path.span).get<NumberValue>()->node;
  if (!readings.claims) return {VerdictValue{node}};
  const MomentI moment = readings.moves ? MomentI(AtEndI{}) : MomentI(StaticI{});
  return made_for_claim(session, readings, {"verdict", {}, moment, node, path.span, false});
}

}  // namespace

bool is_reading_word(std::string_view name) {
  return std::find(kAvailable.begin(), kAvailable.end(), name) != kAvailable.end() ||
         std::find(kLater.begin(), kLater.end(), name) != kLater.end();
}

Value evaluate_reading(Session& session, const Scope& scope, const ast::Path& path) {
  const std::string& word = path.steps.front().name.text;
  if (std::find(kLater.begin(), kLater.end(), word) != kLater.end()) {
    session.report(path.span, diag::not_available, fmt::format("`{}`", word), instead_of(word));
    return {};
  }
  const auto verdict = std::find(kVerdicts.begin(), kVerdicts.end(), word);
  if (verdict != kVerdicts.end() && !path.call) {
    return {VerdictValue{session.graph.constant(static_cast<double>(verdict - kVerdicts.begin()), kNumber, path.span)}};
  }
  if (word == "verdict") return read_verdict(session, scope, path);
  if (word == "lowest" || word == "highest" || word == "final") return read_reduction(session, scope, path, word);
  if (scope.site->readings->claims) {
    session.report(path.span, diag::not_observed, excerpt(session, path.span))
        .remedy("`observe` it under a name and use the name");
    return {};
  }
  if (word == "T1" || word == "T2") return read_times(session, scope, path, word);
  if (word == "population") return read_population(session, scope, path);
  if (word == "mean") return read_mean(session, scope, path);
  if (word == "fidelity") return read_fidelity(session, scope, path);
  return read_levels(session, scope, path, word);
}

Value observed_value(const Graph& graph, const Readings& readings, NodeId value, NodeId node) {
  const Node* at = &graph[value];
  while (at->op == NodeOp::reading) {
    const ReadingI& reading = readings.instance->readings[at->index];
    if (std::holds_alternative<VerdictI>(reading)) return {VerdictValue{node}};
    const auto* reduced = std::get_if<ReduceI>(&reading);
    if (reduced == nullptr) break;
    at = &graph[readings.instance->observables[reduced->observable].value];
  }
  return number_value(node);
}

std::optional<std::string> state_letters(Session& session, const Scope& scope, const ast::Path& path,
                                         std::size_t qubits, std::string_view allowed) {
  if (path.given.size() != 1 || path.given.front().name) {
    session.report(path.span, diag::argument_count, "state", "1 text", path.given.size());
    return std::nullopt;
  }
  const Span span = path.given.front().span;
  const std::string digits = digits_of(session, scope, path.given.front());
  if (!digits.empty()) {
    session.report(span, diag::wrong_kind, "a text", digits).remedy(letters_remedy("state(\"{}\")", digits, qubits));
    return std::nullopt;
  }
  const auto text = evaluate_text(session, scope, path.given.front().value);
  if (!text) return std::nullopt;
  if (text->find_first_not_of(allowed) != std::string::npos) {
    session.report(span, diag::state_letters, *text, std::string(allowed));
    return std::nullopt;
  }
  if (text->size() == qubits) return text;
  session.report(span, diag::state_length, *text, counted(text->size(), "letter"), counted(qubits, "qubit"));
  return std::nullopt;
}

}  // namespace tarn
