#include "lang/check/elements.h"

#include "lang/check/arguments.h"
#include "lang/check/arithmetic.h"
#include "lang/check/declarations.h"
#include "lang/check/expression.h"
#include "lang/check/loops.h"
#include "lang/check/path.h"
#include "lang/check/remedies.h"
#include "lang/program/print.h"
#include "lang/program/operators.h"

namespace tarn {
namespace {

/// The operator of a term; reports what is none.
std::optional<OperatorValue> term_operator(Session& session, const Scope& scope, ast::ExprId id) {
  const Value value = evaluate(session, scope, id);
  if (const auto* op = value.get<OperatorValue>()) return *op;
  if (value.unknown()) return std::nullopt;
  auto tail = session.report(span_of(session, scope, id), diag::wrong_kind, "an operator", describe(value));
  if (value.get<NumberValue>() || value.get<CountValue>()) tail.remedy("multiply it by `I`, X, Y or Z");
  return std::nullopt;
}

bool require_hermitian(Session& session, const OperatorValue& op, Span span) {
  if (is_hermitian(op.terms)) return true;
  session.report(span, diag::not_hermitian, excerpt(session, span)).remedy("add its adjoint, as in `|0><1| + |1><0|`");
  return false;
}

bool require_operator_dimension(Session& session, const Scope& scope, ast::ExprId id, const OperatorValue& op, Dimension expected) {
  if (op.dimension == expected) return true;
  const Span span = span_of(session, scope, id);
  session.report(span, diag::dimension_mismatch, expected, op.dimension, excerpt(session, span))
      .remedy(dimension_remedy(session, scope, id, expected, op.dimension));
  return false;
}

Scope at_site(const Scope& scope, const Site& site) { return {&scope, scope.module, &site, {}}; }

Site changed(const Scope& scope, std::string_view where, bool with_t) {
  Site site = scope.site != nullptr ? *scope.site : Site{};
  site.where = where;
  if (!with_t) site.t.reset();
  return site;
}

/// `Z(q[0])`, `-X(q[1])` for a bare word; empty for other operators.
std::string word_text(const Session& session, const Operator& op, const Unrolled& unrolled) {
  if (op.size() != 1 || std::abs(op[0].factor) != 1 || op[0].factor.imag() != 0) return {};
  const Node& coefficient = session.graph[op[0].coefficient];
  if (coefficient.op != NodeOp::constant || coefficient.number != 1) return {};
  const std::string all = letters(op[0].word, static_cast<std::uint32_t>(unrolled.qubits.size()));
  std::string word, places;
  for (std::size_t q = 0; q < all.size(); ++q) {
    if (all[q] == 'I') continue;
    word += all[q];
    places += (places.empty() ? "" : ", ") + unrolled.qubits[q].path;
  }
  return word.empty() ? "" : fmt::format("{}{}({})", op[0].factor.real() < 0 ? "-" : "", word, places);
}

std::string placed_text(Session& session, const Scope& scope, ast::ExprId id, const Operator& op, const TermPlace& place) {
  const std::string word = word_text(session, op, place.unrolled);
  if (!word.empty()) return word;
  const std::string& where = place.where;
  const std::string text = excerpt(session, span_of(session, scope, id));
  const bool in_chip = scope.site != nullptr && !scope.site->own_qubits;
  if (in_chip || where.empty()) return text;
  return fmt::format("{} on {}", text, where);
}

bool depends_on_t(const Session& session, const OperatorValue& op) {
  for (const OperatorTerm& term : op.terms) {
    if (dependence(session.graph, term.coefficient).t) return true;
  }
  return false;
}

/// A bath that is not known may want a lever: then the dimension is left open.
std::optional<OperatorValue> noise_operator(Session& session, const Scope& scope, ast::ExprId id, bool known_bath) {
  const auto op = term_operator(session, scope, id);
  const Span span = span_of(session, scope, id);
  if (!op || !require_hermitian(session, *op, span)) return std::nullopt;
  if (known_bath && !require_operator_dimension(session, scope, id, *op, kNumber)) return std::nullopt;
  if (!depends_on_t(session, *op)) return op;
  session.report(span, diag::name_not_here, "t", "in `noise`");
  return std::nullopt;
}

struct NoiseSink {
  Session& session;
  const ast::NoiseTerm& term;
  const TermPlace& place;
  std::optional<NoiseTerm> shared{};

  /// Without a bath the operators are checked only.
  void add(const Scope& scope, std::optional<std::uint32_t> bath, const std::string& bath_text) {
    for (const ast::ExprId id : term.operators) {
      const auto op = noise_operator(session, scope, id, bath.has_value());
      if (!op || !bath) continue;
      const std::string text = placed_text(session, scope, id, op->terms, place);
      if (!term.shared) {
        place.unrolled.noise.push_back({op->terms, *bath, fmt::format("{} ~ {}", text, bath_text), term.span});
      } else if (!shared) {
        shared = NoiseTerm{op->terms, *bath, text, term.span};
      } else {
        shared->op = sum(shared->op, op->terms);
        shared->what += ", " + text;
      }
    }
  }
};

/// Copies are told apart by the one index of one loop.
bool check_correlation_form(Session& session, const ast::NoiseTerm& term) {
  const auto refuse = [&](Span span, std::string_view needs) {
    session.report(span, diag::correlation_form, needs).remedy("`noise Z(q[i]) ~ cold for i in 0 .. n-1 correlation(i, j) = c^abs(i - j)`");
    return false;
  };
  const ast::Correlation& correlation = *term.correlation;
  if (term.shared) return refuse(term.span, "a copy of the bath for each operator, `shared` makes one of all");
  if (term.operators.size() != 1) return refuse(term.span, "a single operator");
  if (term.loops.size() != 1) return refuse(correlation.span, "one loop before it");
  if (term.loops.front().names.size() != 1) return refuse(term.loops.front().span, "a loop over one index");
  if (correlation.first.text != correlation.second.text) return true;
  session.report(correlation.second.span, diag::duplicate_name, correlation.second.text).note(correlation.first.span, "first declared here");
  return false;
}

std::string index_text(const ast::Name& name, const Value& value, std::size_t copy) {
  const auto* count = value.get<CountValue>();
  return count != nullptr && count->value ? fmt::format("{} = {}", name.text, *count->value) : fmt::format("copy {}", copy);
}

/// The matrix of correlations of the copies first, first + 1, ... whose indices are given.
void elaborate_correlation(Session& session, const Scope& scope, const ast::NoiseTerm& term, std::size_t first,
                           const std::vector<Value>& indices, Unrolled& unrolled) {
  const ast::Correlation& correlation = *term.correlation;
  Site site = *scope.site;
  site.where = "in `correlation`";
  site.operators = false;
  site.s.reset();
  CorrelationI made{static_cast<std::uint32_t>(first), static_cast<std::uint32_t>(indices.size()), {}, {}, span_of(session, scope, correlation.value)};
  for (std::size_t i = 0; i < indices.size(); ++i) {
    made.indices.push_back(index_text(term.loops.front().names.front(), indices[i], i));
    for (const Value& other : indices) {
      Scope inner{&scope, scope.module, &site, {}};
      declare(session, inner, correlation.first, indices[i]);
      declare(session, inner, correlation.second, other);
      const auto element = evaluate_quantity(session, inner, correlation.value, kNumber);
      if (!element) return;
      made.elements.push_back(*element);
    }
  }
  if (unrolled.noise.size() - first != indices.size()) return;  // What is missing was reported, or is not known.
  for (std::size_t i = first + 1; i < unrolled.noise.size(); ++i) {
    if (unrolled.noise[i].bath == unrolled.noise[first].bath) continue;
    session.report(term.bath.span, diag::correlation_form, "copies of one bath");
    return;
  }
  if (made.count > 0) unrolled.correlations.push_back(std::move(made));
}

/// Terms as the program's dump shows them.
std::vector<std::string> describe_terms(const Session& session, const Unrolled& unrolled, std::uint32_t qubits) {
  std::vector<std::string> lines;
  const GraphNames names{[&](std::uint32_t index) {
    return index >= kOpaque ? session.opaque[index - kOpaque] : session.parameters[index].name;
  }};
  const auto add = [&](std::string_view word, const Operator& op, const std::string& more) {
    lines.push_back(fmt::format("{} {}{}", word, to_text(session.graph, most_significant_first(op, qubits), qubits, names), more));
  };
  for (const EnergyTerm& term : unrolled.energy) add("energy", term.op, "");
  for (const NoiseTerm& term : unrolled.noise) add("noise", term.op, " ~ " + unrolled.baths[term.bath].name);
  for (const JumpTerm& term : unrolled.jumps) add("jump", term.op, "");
  return lines;
}

std::string end_text(const std::vector<std::uint32_t>& ends, const Unrolled& unrolled) {
  std::string result;
  for (const std::uint32_t end : ends) result += (result.empty() ? "" : ", ") + unrolled.qubits[end].path;
  return result;
}

/// s and t of a kind, its operators' qubits, and s1, s2 of a coupler.
Site kind_site(Session& session, const Callable& kind, const std::vector<std::uint32_t>& ends, const TermPlace& place,
               Scope& scope) {
  Graph& graph = session.graph;
  const bool qubit = kind.kind == CallableKind::qubit;
  Site site{.where = qubit ? "in a qubit" : "in a coupler"};
  const NodeId pace_s = graph.add({.op = NodeOp::s});
  site.s = qubit ? place.unrolled.qubit_s[ends[0]] : pace_s;
  site.t = graph.add({.op = NodeOp::t, .dimension = kTime});
  site.own_qubits = ends;
  if (!qubit) {
    const ast::Name first{declaration_span(kind), "s1"};
    const ast::Name second{declaration_span(kind), "s2"};
    declare(session, scope, first, number_value(place.unrolled.qubit_s[ends[0]]));
    declare(session, scope, second, number_value(place.unrolled.qubit_s[ends[1]]));
  }
  return site;
}

void elaborate_entries(Session& session, const Scope& scope, const ast::Kind& kind, const TermPlace& place) {
  for (const ast::KindEntry& entry : kind.entries) {
    if (const auto* energy = std::get_if<ast::EnergyTerm>(&entry)) elaborate_energy(session, scope, *energy, place);
    if (const auto* jump = std::get_if<ast::JumpTerm>(&entry)) elaborate_jump(session, scope, *jump, place);
    if (const auto* noise = std::get_if<ast::NoiseTerm>(&entry)) elaborate_noise(session, scope, *noise, place);
  }
}

void elaborate_body(Session& session, const Callable& callable, Scope& scope, const std::vector<std::uint32_t>& ends,
                    const TermPlace& place) {
  const auto& kind = std::get<ast::Kind>(*callable.item);
  const Site site = kind_site(session, callable, ends, place, scope);
  scope.site = &site;
  for (const ast::KindEntry& entry : kind.entries) {
    if (const auto* let = std::get_if<ast::Let>(&entry)) declare_let(session, scope, *let);
  }
  for (const ast::KindEntry& entry : kind.entries) {
    if (const auto* let = std::get_if<ast::Let>(&entry)) look_up(session, scope, let->name);
  }
  elaborate_entries(session, scope, kind, place);
  scope.site = nullptr;
}

}  // namespace

void elaborate_energy(Session& session, const Scope& scope, const ast::EnergyTerm& term, const TermPlace& place) {
  const Site site = changed(scope, "in `energy`", true);
  for_each(session, at_site(scope, site), term.loops, [&](const Scope& inner) {
    const auto op = term_operator(session, inner, term.value);
    if (!op) return;
    const Span span = span_of(session, inner, term.value);
    const bool fits = op->dimension == kEnergy || require_operator_dimension(session, inner, term.value, *op, kFrequency);
    if (!fits || !require_hermitian(session, *op, span)) return;
    place.unrolled.energy.push_back({op->terms, place.where, excerpt(session, span), span});
  });
}

void elaborate_jump(Session& session, const Scope& scope, const ast::JumpTerm& term, const TermPlace& place) {
  const Site site = changed(scope, "in `jump`", true);
  for_each(session, at_site(scope, site), term.loops, [&](const Scope& inner) {
    const auto op = term_operator(session, inner, term.value);
    const Dimension root_of_rate = pow(kRate, Rational::of(1, 2));
    if (!op) return;
    const Span span = span_of(session, inner, term.value);
    if (op->dimension != root_of_rate) {
      session.report(span, diag::dimension_mismatch, root_of_rate, op->dimension, excerpt(session, span))
          .remedy("`jump` takes the root of a rate, which is per time: `sqrt(5 [1/us]) * |0><1|`");
      return;
    }
    place.unrolled.jumps.push_back({op->terms, placed_text(session, inner, term.value, op->terms, place), term.span});
  });
}

void elaborate_noise(Session& session, const Scope& scope, const ast::NoiseTerm& term, const TermPlace& place) {
  if (term.correlation && !check_correlation_form(session, term)) return;
  const std::size_t first = place.unrolled.noise.size();
  std::vector<Value> indices;
  const Site site = changed(scope, "in `noise`", false);
  NoiseSink sink{session, term, place};
  for_each(session, at_site(scope, site), term.loops, [&](const Scope& inner) {
    const auto callable = resolve_callable(session, inner, term.bath, {CallableKind::bath}, "a bath");
    const auto bath = callable ? elaborate_bath(session, *callable, place.unrolled, term.bath.span) : std::nullopt;
    sink.add(inner, bath, excerpt(session, term.bath.span));
    if (term.correlation) indices.push_back(inner.names.find(term.loops.front().names.front().text)->second.value.value_or(Value{}));
  });
  if (term.correlation) elaborate_correlation(session, at_site(scope, site), term, first, indices, place.unrolled);
  if (sink.shared) {
    sink.shared->what = fmt::format("shared {} ~ {}", sink.shared->what, excerpt(session, term.bath.span));
    place.unrolled.noise.push_back(*sink.shared);
  }
}

void elaborate_kind(Session& session, const Callable& kind, const std::vector<std::uint32_t>& ends,
                    const TermPlace& place, Span span) {
  Scope scope{nullptr, kind.module, nullptr, {}};
  if (!complete_arguments(session, kind, scope, span)) return;
  const FrameGuard frame(session, span, fmt::format("placed here on {}", end_text(ends, place.unrolled)));
  elaborate_body(session, kind, scope, ends, place);
}

void warn_of_repeated_noise(Session& session, const std::vector<const ast::NoiseTerm*>& terms, const Scope& scope) {
  std::map<std::string, Span> first;
  for (const ast::NoiseTerm* term : terms) {
    if (term->shared) continue;
    std::string loops;
    for (const ast::Loop& loop : term->loops) loops += " " + one_line(session.text(loop.span));
    for (const ast::ExprId id : term->operators) {
      const Span span = span_of(session, scope, id);
      const std::string text = one_line(session.text(span)) + " ~ " + one_line(session.text(term->bath.span));
      const auto [before, is_new] = first.try_emplace(text + loops, span);
      if (is_new) continue;
      session.report(span, diag::noise_twice, text).note(before->second, "first here").remedy("take one out, or multiply a single one by `sqrt(2)`");
    }
  }
}

std::vector<std::string> check_kind(Session& session, const Callable& callable) {
  Unrolled unrolled;
  const bool qubit = callable.kind == CallableKind::qubit;
  std::vector<std::uint32_t> ends;
  for (std::uint32_t q = 0; q < (qubit ? 1u : 2u); ++q) {
    ends.push_back(q);
    unrolled.qubits.push_back({qubit ? "" : fmt::format("end {}", q + 1), {}, {}, {}});
    const NodeId s = session.graph.add({.op = NodeOp::s});
    unrolled.qubit_s.push_back(qubit ? s : opaque_number(session, fmt::format("s{}", q + 1), kNumber, declaration_span(callable)));
  }
  Scope scope{nullptr, callable.module, nullptr, {}};
  declare_opaque(session, callable, scope);
  std::vector<const ast::NoiseTerm*> noise;
  for (const ast::KindEntry& entry : std::get<ast::Kind>(*callable.item).entries) {
    if (const auto* term = std::get_if<ast::NoiseTerm>(&entry)) noise.push_back(term);
  }
  warn_of_repeated_noise(session, noise, scope);
  elaborate_body(session, callable, scope, ends, {unrolled, ""});
  return describe_terms(session, unrolled, qubit ? 1 : 2);
}

}  // namespace tarn
