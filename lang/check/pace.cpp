#include <algorithm>
#include <array>
#include <cmath>
#include <numeric>
#include <span>

#include "lang/check/experiment.h"
#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/check/samples.h"
#include "lang/check/tables.h"
#include "lang/support/near.h"

namespace tarn {
namespace {

constexpr std::string_view kBegins =
    "`begin` available: ground, thermal, thermal(T), steady, plus, state(\"01+-\"), populations(...)";
constexpr auto kBeginWords = std::to_array<std::string_view>({"ground", "thermal", "steady", "plus", "state", "populations"});

void report_begin(Session& session, std::string_view word, Span span, std::size_t qubits) {
  const std::string text = excerpt(session, span);
  auto tail = session.report(span, diag::unknown_begin, text);
  if (word == "state") tail.remedy("`begin state(\"01\")`, a letter for each qubit");
  else if (text.starts_with('"')) tail.remedy(fmt::format("`begin state({})`", text));
  else if (text.find_first_not_of("01") == std::string::npos) tail.remedy(letters_remedy("begin state(\"{}\")", text, qubits));
  else tail.remedy(near_and(word, kBeginWords, kBegins));
}

std::optional<BeginI> begin_populations(Session& session, const Scope& scope, const ast::Path& path, std::size_t qubits) {
  BeginPopulationsI begin;
  double total = 0;
  for (const ast::Given& given : path.given) {
    const auto weight = evaluate_quantity(session, scope, given.value, kNumber);
    if (!weight) return std::nullopt;
    begin.weights.push_back(*weight);
    const double value = value_at_defaults(session, *weight).value_or(NAN);
    if (value < 0) session.report(given.span, diag::negative_population, value);
    total += value;
  }
  const bool too_many = qubits < 32 && begin.weights.size() > (std::size_t{1} << qubits);
  if (too_many) session.report(path.span, diag::unknown_level, static_cast<std::int64_t>(begin.weights.size() - 1), std::exp2(qubits));
  if (begin.weights.empty() || std::abs(total - 1) > 1e-9) session.report(path.span, diag::populations_sum, total);
  return begin;
}

std::optional<BeginI> begin_of(Session& session, const Scope& scope, const ast::Path& path, std::size_t qubits) {
  const std::string& word = path.steps.front().name.text;
  if (word == "ground" && !path.call) return BeginGroundI{};
  if (word == "plus" && !path.call) return BeginPlusI{};
  if (word == "steady" && !path.call) return BeginSteadyI{};
  if (word == "thermal" && path.given.empty()) return BeginThermalI{};
  if (word == "thermal" && path.given.size() == 1) {
    const auto temperature = evaluate_quantity(session, scope, path.given.front().value, kTemperature);
    if (!temperature) return std::nullopt;
    const auto value = value_at_defaults(session, *temperature);
    if (value && !(*value >= 0)) {
      session.report(path.given.front().span, diag::below_zero, "a temperature",
                     in_unit(*value, written_unit(session.ast(scope), path.given.front().value, kTemperature)));
    }
    return BeginThermalI{*temperature};
  }
  if (word == "state" && path.call) {
    const auto letters = state_letters(session, scope, path, qubits, "01+-");
    return letters ? std::optional<BeginI>(BeginStateI{*letters}) : std::nullopt;
  }
  if (word == "populations" && path.call) return begin_populations(session, scope, path, qubits);
  report_begin(session, word, path.span, qubits);
  return std::nullopt;
}

class PaceReader {
 public:
  PaceReader(Session& session, const Scope& scope, Instance& instance)
      : session_(session), scope_(scope), instance_(instance) {}

  void read(const ast::Piece& piece, bool first) {
    const auto& kind = piece.piece;
    if (const auto* start = std::get_if<ast::StartPiece>(&kind)) {
      if (!first) session_.report(piece.span, diag::start_first);
      if (const auto s = position(start->s)) instance_.pace.push_back(PaceStartI{*s});
    }
    if (const auto* ramp = std::get_if<ast::RampPiece>(&kind)) {
      const auto to = position(ramp->s);
      const auto over = duration(ramp->duration);
      if (to && over) instance_.pace.push_back(PaceRampI{*to, *over});
    }
    if (const auto* hold = std::get_if<ast::HoldPiece>(&kind)) {
      if (const auto time = duration(hold->duration, true)) instance_.pace.push_back(PaceHoldI{*time});
    }
    if (const auto* step = std::get_if<ast::StepPiece>(&kind)) {
      if (const auto to = position(step->s)) instance_.pace.push_back(PaceStepI{*to});
    }
    if (const auto* follow = std::get_if<ast::FollowPiece>(&kind)) read_follow(follow->waveform);
  }

 private:
  std::optional<NodeId> position(ast::ExprId id) {
    const auto s = evaluate_quantity(session_, scope_, id, kNumber);
    if (!s) return std::nullopt;
    const auto value = value_at_defaults(session_, *s);
    if (value && !(*value >= 0 && *value <= 1)) session_.report(span_of(session_, scope_, id), diag::pace_outside, *value);
    return s;
  }

  std::optional<NodeId> duration(ast::ExprId id, bool may_be_zero = false) {
    const auto time = evaluate_quantity(session_, scope_, id, kTime);
    if (!time) return std::nullopt;
    const auto value = value_at_defaults(session_, *time);
    if (!value) return time;
    const Span span = span_of(session_, scope_, id);
    const std::string found = in_unit(*value, written_unit(session_.ast(scope_), id, kTime));
    if (may_be_zero) {
      if (!(*value >= 0)) session_.report(span, diag::below_zero, "a duration", found);
    } else if (!(*value > 0)) {
      session_.report(span, diag::not_positive, "a duration", found).remedy("`step to` is sudden");
    }
    return time;
  }

  void read_follow(const ast::Path& path) {
    const auto table = read_waveform(session_, scope_, path);
    if (!table) return;
    PaceFollowI follow{table->x, table->y, path.span};
    for (double& t : follow.t) t -= table->x.front();
    instance_.pace.push_back(std::move(follow));
  }

  Session& session_;
  const Scope& scope_;
  Instance& instance_;
};

}  // namespace

void elaborate_begin(Session& session, const Scope& scope, const ast::Begin& begin, Instance& instance) {
  const auto* use = std::get_if<ast::Use>(&session.ast(scope).expr(begin.state).node);
  const Span span = span_of(session, scope, begin.state);
  const bool plain = use != nullptr && use->held.empty() && !use->under && use->path.steps.size() == 1;
  if (!plain) {
    report_begin(session, "", span, instance.qubits.size());
    return;
  }
  instance.begin = begin_of(session, scope, use->path, instance.qubits.size());
}

void elaborate_pace(Session& session, const Scope& scope, const ast::Pace& pace, Instance& instance) {
  PaceReader reader(session, scope, instance);
  for (const ast::Piece& piece : pace.pieces) reader.read(piece, &piece == &pace.pieces.front());
}

}  // namespace tarn
