#include "runtime/experiment/claims.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

/// All rows at the central values, and with one observable after the other moved up and down.
struct Variations {
  std::vector<double> centre;
  std::vector<std::pair<std::vector<double>, std::vector<double>>> moved;  ///< (down, up)
};

Result<Variations, RunError> vary(const ClaimRows& rows, std::span<const double> values,
                                  std::span<const double> errors, Instant at) {
  Variations all;
  auto centre = rows(values, at);
  if (!centre) return Unexpected{centre.error()};
  all.centre = std::move(centre).value();
  std::vector<double> shifted(values.begin(), values.end());
  for (std::size_t o = 0; o < values.size(); ++o) {
    if (!(errors[o] > 0)) continue;
    shifted[o] = values[o] - errors[o];
    auto down = rows(shifted, at);
    shifted[o] = values[o] + errors[o];
    auto up = rows(shifted, at);
    shifted[o] = values[o];
    if (!down) return Unexpected{down.error()};
    if (!up) return Unexpected{up.error()};
    all.moved.emplace_back(std::move(down).value(), std::move(up).value());
  }
  return all;
}

Judgement decided(double margin, double error, bool edge_holds) {
  if (std::isnan(margin) || std::isnan(error)) return {Verdict::undecided, margin, error};
  if (margin > error || (margin == error && error == 0 && edge_holds)) return {Verdict::holds, margin, error};
  if (margin < -error || (margin == 0 && error == 0)) return {Verdict::fails, margin, error};
  return {Verdict::undecided, margin, error};
}

Judgement compare(const ClaimNode& node, const Variations& rows) {
  const auto difference = [&](const std::vector<double>& row) { return row[node.lhs] - row[node.rhs]; };
  const double centre = difference(rows.centre);
  double error = 0;
  for (const auto& [down, up] : rows.moved) {
    error += std::max(std::abs(difference(down) - centre), std::abs(difference(up) - centre));
  }
  switch (node.relation) {
    case Relation::less: return decided(-centre, error, false);
    case Relation::less_equal: return decided(-centre, error, true);
    case Relation::greater: return decided(centre, error, false);
    case Relation::greater_equal: return decided(centre, error, true);
    // Two numbers known to an error are equal if they agree within it.
    case Relation::equal:
      return {std::abs(centre) <= error ? Verdict::holds : Verdict::fails, error - std::abs(centre), 0};
    case Relation::not_equal:
      return {std::abs(centre) > error ? Verdict::holds : Verdict::fails, std::abs(centre) - error, 0};
  }
  TARN_CHECK(false);
}

Judgement truth(const ClaimNode& node, const Variations& rows) {
  const bool holds = rows.centre[node.lhs] != 0;
  const bool steady = std::all_of(rows.moved.begin(), rows.moved.end(), [&](const auto& pair) {
    return (pair.first[node.lhs] != 0) == holds && (pair.second[node.lhs] != 0) == holds;
  });
  const double margin = holds ? kInfinity : -kInfinity;
  return {!steady ? Verdict::undecided : holds ? Verdict::holds : Verdict::fails, steady ? margin : 0, 0};
}

/// Which of two decides a conjunction: the one that is worse.
bool worse(const Judgement& a, const Judgement& b) {
  const auto rank = [](Verdict v) { return v == Verdict::fails ? 0 : v == Verdict::undecided ? 1 : 2; };
  if (rank(a.verdict) != rank(b.verdict)) return rank(a.verdict) < rank(b.verdict);
  return a.margin - a.error < b.margin - b.error;
}

Judgement negated(Judgement inner) {
  if (inner.verdict != Verdict::undecided) {
    inner.verdict = inner.verdict == Verdict::holds ? Verdict::fails : Verdict::holds;
  }
  inner.margin = -inner.margin;
  return inner;
}

Judgement judge_node(const ClaimNode& node, const Variations& rows) {
  if (node.kind == ClaimKind::compare) return compare(node, rows);
  if (node.kind == ClaimKind::truth) return truth(node, rows);
  TARN_CHECK(!node.children.empty());
  Judgement result = judge_node(node.children.front(), rows);
  if (node.kind == ClaimKind::no) return negated(result);
  for (std::size_t i = 1; i < node.children.size(); ++i) {
    const Judgement next = judge_node(node.children[i], rows);
    const bool take = node.kind == ClaimKind::all ? worse(next, result) : worse(result, next);
    if (take) result = next;
  }
  return result;
}

/// A place where a claim is judged, with the observables that have a value there.
struct Spot {
  Instant at;
  std::vector<double> values, errors;
};

/// Observables with one value hold at every place; those with more must all be there.
std::vector<Spot> spots_of(const Plan& plan, const Claim& claim, const PointOutcome& outcome, std::span<const Answer> under) {
  const std::size_t count = plan.observables.size();
  Spot once{{0, 0}, std::vector<double>(count + under.size(), NAN), std::vector<double>(count + under.size(), 0.0)};
  for (std::size_t u = 0; u < under.size(); ++u) once.values[count + u] = under[u].value;
  for (const std::uint32_t u : claim.under) once.errors[count + u] = under[u].error;
  // Rows of other claims are computed along: give them numbers that exist.
  for (std::size_t o = 0; o < count; ++o) {
    if (!outcome.series.empty() && !outcome.series[o].empty()) once.values[o] = outcome.series[o].front().answer.value;
  }
  std::vector<std::uint32_t> along;
  for (const std::uint32_t o : claim.observables) {
    if (occurrence_of(plan, plan.observables[o]) != Occurrence::once) {
      along.push_back(o);
    } else if (!outcome.series.empty() && !outcome.series[o].empty()) {
      once.errors[o] = outcome.series[o].front().answer.error;
    }
  }
  if (along.empty()) return {once};
  std::map<std::pair<double, double>, std::pair<Spot, std::size_t>> places;
  for (const std::uint32_t o : along) {
    for (const Sample& sample : outcome.series[o]) {
      auto& [spot, hits] = places.try_emplace({sample.at.t, sample.at.s}, once, 0).first->second;
      spot.at = sample.at;
      spot.values[o] = sample.answer.value;
      spot.errors[o] = sample.answer.error;
      ++hits;
    }
  }
  std::vector<Spot> spots;
  for (auto& [key, entry] : places) {
    if (entry.second == along.size()) spots.push_back(std::move(entry.first));
  }
  return spots;
}

void add(const Judgement& judgement, std::uint64_t point, const std::string& equation, std::optional<Instant> at, ClaimTally& tally) {
  ++tally.selected;
  if (judgement.verdict == Verdict::holds) ++tally.holding;
  if (judgement.verdict == Verdict::fails) ++tally.failing;
  if (judgement.verdict == Verdict::undecided) ++tally.straddling;
  if (!tally.weakest || worse(judgement, *tally.weakest)) {
    tally.weakest = judgement;
    tally.weakest_point = point;
    tally.weakest_equation = equation;
    tally.weakest_at = at;
  }
}

/// True if `where` leaves a point out whatever its observables are.
bool left_out(const Plan& plan, const Claim& claim, const ClaimRows& rows) {
  if (!claim.where) return false;
  const std::size_t count = plan.observables.size() + plan.under.size();
  const std::vector<double> unknown(count, NAN), none(count, 0.0);
  const auto selected = judge(*claim.where, rows, unknown, none, {0, 0});
  return selected && selected->verdict == Verdict::fails;
}

bool reads_along(const Plan& plan, const Claim& claim) {
  return std::any_of(claim.observables.begin(), claim.observables.end(), [&](std::uint32_t o) {
    return occurrence_of(plan, plan.observables[o]) != Occurrence::once;
  });
}

}  // namespace

Result<Judgement, RunError> judge(const ClaimNode& node, const ClaimRows& rows, std::span<const double> values,
                                  std::span<const double> errors, Instant at) {
  const auto variations = vary(rows, values, errors, at);
  if (!variations) return Unexpected{variations.error()};
  return judge_node(node, *variations);
}

Result<Done, RunError> tally_point(const Plan& plan, const Claim& claim, const ClaimRows& rows,
                                   const PointOutcome& outcome, ClaimTally& tally, std::span<const Answer> under) {
  TARN_CHECK(under.size() == plan.under.size());
  // Where every observable is under a named equation there is one answer for all of them.
  const std::string equation = claim.under_all ? "" : plan.choice.label;
  if (outcome.error && !claim.under_all) {
    if (!left_out(plan, claim, rows)) add({Verdict::fails, -kInfinity, 0}, outcome.index, equation, std::nullopt, tally);
    return Done{};
  }
  const bool along = reads_along(plan, claim);
  for (const Spot& spot : spots_of(plan, claim, outcome, under)) {
    if (claim.where) {
      const auto selected = judge(*claim.where, rows, spot.values, spot.errors, spot.at);
      if (!selected) return Unexpected{selected.error()};
      if (selected->verdict == Verdict::fails) continue;
    }
    const auto judgement = judge(claim.holds, rows, spot.values, spot.errors, spot.at);
    if (!judgement) return Unexpected{judgement.error()};
    if (judgement->verdict == Verdict::undecided && std::isnan(judgement->margin)) ++tally.valueless;
    add(*judgement, outcome.index, equation, along ? std::optional(spot.at) : std::nullopt, tally);
  }
  return Done{};
}

ClaimReport conclude(const Claim& claim, const ClaimTally& tally, bool sampled, bool unfinished) {
  ClaimReport report{claim.text, claim.place, Verdict::holds, "", tally};
  if (tally.failing > 0) {
    report.verdict = Verdict::fails;
    report.reason = fmt::format("fails at {} of {} places", tally.failing, tally.selected);
  } else if (tally.valueless > 0) {
    report.verdict = Verdict::fails;
    report.reason = fmt::format("an observable has no value at {} of {} places, which `where` can leave out",
                                tally.valueless, tally.selected);
  } else if (tally.straddling > 0) {
    report.verdict = Verdict::fails;
    report.reason = fmt::format("the error straddles the limit at {} of {} places", tally.straddling, tally.selected);
  } else if (sampled || unfinished) {
    report.verdict = Verdict::undecided;
    report.reason = sampled ? "only a sample of the grid was run" : "the run was not finished";
  } else if (tally.selected == 0) {
    report.verdict = Verdict::fails;
    report.reason = claim.where ? "`where` selects no point" : "there is no point to judge";
  }
  return report;
}

const char* verdict_name(Verdict verdict) {
  switch (verdict) {
    case Verdict::holds: return "holds";
    case Verdict::fails: return "fails";
    case Verdict::undecided: return "undecided";
  }
  TARN_CHECK(false);
}

}  // namespace tarn::runtime
