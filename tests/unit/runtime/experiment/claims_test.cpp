#include <catch2/catch.hpp>

#include <cmath>

#include "runtime/experiment/claims.h"

using namespace tarn;
using namespace tarn::runtime;

namespace {

/// Rows: 0 the first observable, 1 the second, 2 their difference, 3 the limit 0.5, 4 t > 5, 5 s.
Result<std::vector<double>, RunError> rows(std::span<const double> o, Instant at) {
  return std::vector<double>{o[0], o[1], o[0] - o[1], 0.5, at.t > 5 ? 1.0 : 0.0, at.s};
}

ClaimNode compare(Relation relation, std::uint32_t lhs, std::uint32_t rhs) {
  return {ClaimKind::compare, relation, lhs, rhs, {}};
}

Judgement judged(const ClaimNode& node, double a, double b, double ea, double eb) {
  const std::vector<double> values = {a, b}, errors = {ea, eb};
  const auto result = judge(node, rows, values, errors, {0, 0});
  REQUIRE(result);
  return *result;
}

Plan plan_with(Moment first, Moment second) {
  Plan plan;
  Observable a, b;
  a.name = "a";
  a.moment = first;
  b.name = "b";
  b.moment = second;
  plan.observables = {a, b};
  return plan;
}

}  // namespace

TEST_CASE("margins and error bars of comparisons") {
  const ClaimNode above = compare(Relation::greater_equal, 0, 3);
  CHECK(judged(above, 0.6, 0, 0.01, 0).verdict == Verdict::holds);
  CHECK(judged(above, 0.6, 0, 0.01, 0).margin == Approx(0.1));
  CHECK(judged(above, 0.6, 0, 0.01, 0).error == Approx(0.01));
  CHECK(judged(above, 0.4, 0, 0.01, 0).verdict == Verdict::fails);
  CHECK(judged(above, 0.505, 0, 0.01, 0).verdict == Verdict::undecided);
  CHECK(judged(above, 0.5, 0, 0, 0).verdict == Verdict::holds);
  CHECK(judged(compare(Relation::greater, 0, 3), 0.5, 0, 0, 0).verdict == Verdict::fails);
  CHECK(judged(compare(Relation::less, 0, 3), 0.5, 0, 0, 0).verdict == Verdict::fails);
  CHECK(judged(compare(Relation::less_equal, 0, 3), 0.5, 0, 0, 0).verdict == Verdict::holds);
  CHECK(judged(above, NAN, 0, 0, 0).verdict == Verdict::undecided);
}

TEST_CASE("errors of several observables add up") {
  const ClaimNode less = compare(Relation::less, 2, 3);
  CHECK(judged(less, 0.7, 0.4, 0.05, 0.1).error == Approx(0.15));
  CHECK(judged(less, 0.7, 0.4, 0.05, 0.1).verdict == Verdict::holds);
  CHECK(judged(less, 0.7, 0.3, 0.05, 0.1).verdict == Verdict::undecided);
}

TEST_CASE("equality is agreement within the error") {
  CHECK(judged(compare(Relation::equal, 0, 1), 0.7, 0.71, 0.005, 0.006).verdict == Verdict::holds);
  CHECK(judged(compare(Relation::equal, 0, 1), 0.7, 0.72, 0.005, 0.006).verdict == Verdict::fails);
  CHECK(judged(compare(Relation::not_equal, 0, 1), 0.7, 0.72, 0.005, 0.006).verdict == Verdict::holds);
}

TEST_CASE("and, or, not over comparisons") {
  const ClaimNode high = compare(Relation::greater, 0, 3), low = compare(Relation::less, 1, 3);
  const ClaimNode both{ClaimKind::all, Relation::less, 0, 0, {high, low}};
  const ClaimNode either{ClaimKind::any, Relation::less, 0, 0, {high, low}};
  const ClaimNode neither{ClaimKind::no, Relation::less, 0, 0, {either}};
  CHECK(judged(both, 0.9, 0.1, 0.01, 0.01).verdict == Verdict::holds);
  CHECK(judged(both, 0.9, 0.1, 0.01, 0.01).margin == Approx(0.4));
  CHECK(judged(both, 0.9, 0.6, 0.01, 0.01).verdict == Verdict::fails);
  CHECK(judged(both, 0.9, 0.5, 0.01, 0.01).verdict == Verdict::undecided);
  CHECK(judged(either, 0.9, 0.5, 0.01, 0.01).verdict == Verdict::holds);
  CHECK(judged(either, 0.2, 0.5, 0.01, 0.01).verdict == Verdict::undecided);
  CHECK(judged(neither, 0.2, 0.9, 0.01, 0.01).verdict == Verdict::holds);
  CHECK(judged(neither, 0.9, 0.9, 0.01, 0.01).verdict == Verdict::fails);
}

TEST_CASE("a claim on a trace is judged at its instants, `where` selects") {
  const Plan plan = plan_with(Along{3}, AtEnd{});
  PointOutcome point;
  point.index = 4;
  point.series = {{{{0, 0}, {0.9, 0}}, {{6, 0.6}, {0.2, 0}}, {{10, 1}, {0.8, 0}}}, {{{0, 0}, {0.1, 0}}}};
  Claim claim;
  claim.text = "a > b + 0.3";
  claim.observables = {0};
  claim.holds = compare(Relation::greater, 0, 3);
  ClaimTally tally;
  REQUIRE(tally_point(plan, claim, rows, point, tally));
  CHECK(tally.selected == 3);
  CHECK(tally.failing == 1);
  CHECK(tally.weakest_at->t == 6);
  CHECK(tally.weakest_point == 4);
  CHECK(conclude(claim, tally, false, false).verdict == Verdict::fails);

  claim.where = compare(Relation::greater, 5, 3);
  claim.where->lhs = 5;  // s > 0.5
  ClaimTally later;
  REQUIRE(tally_point(plan, claim, rows, point, later));
  CHECK(later.selected == 2);

  claim.observables = {1};
  claim.holds = compare(Relation::less, 1, 3);
  claim.where.reset();
  ClaimTally once;
  REQUIRE(tally_point(plan, claim, rows, point, once));
  CHECK(once.selected == 1);
  CHECK(conclude(claim, once, false, false).verdict == Verdict::holds);
}

TEST_CASE("final words of claims") {
  Claim claim;
  claim.where = ClaimNode{};
  ClaimTally none;
  CHECK(conclude(claim, none, false, false).verdict == Verdict::fails);
  CHECK(conclude(claim, none, true, false).verdict == Verdict::undecided);
  ClaimTally good;
  good.selected = good.holding = 5;
  CHECK(conclude(claim, good, false, false).verdict == Verdict::holds);
  CHECK(conclude(claim, good, true, false).verdict == Verdict::undecided);
  CHECK(conclude(claim, good, false, true).verdict == Verdict::undecided);
  ClaimTally close = good;
  close.straddling = 1;
  CHECK(conclude(claim, close, false, false).verdict == Verdict::fails);
  ClaimTally bad = good;
  bad.failing = 1;
  CHECK(conclude(claim, bad, true, false).verdict == Verdict::fails);
}

TEST_CASE("a failed point fails a claim unless `where` leaves it out") {
  const Plan plan = plan_with(AtEnd{}, AtEnd{});
  PointOutcome point;
  point.error = RunError{"not_finite", "no"};
  Claim claim;
  claim.observables = {0};
  claim.holds = compare(Relation::greater, 0, 3);
  ClaimTally tally;
  REQUIRE(tally_point(plan, claim, rows, point, tally));
  CHECK(tally.failing == 1);
  claim.where = compare(Relation::greater, 5, 3);  // s > 0.5, and s is 0 here
  ClaimTally left_out;
  REQUIRE(tally_point(plan, claim, rows, point, left_out));
  CHECK(left_out.selected == 0);
}

TEST_CASE("a claim on an observable without a value fails and says so, unless `where` leaves the point out") {
  const Plan plan = plan_with(AtEnd{}, AtTime{});
  Claim claim;
  claim.text = "b <= 0.5";
  claim.holds = compare(Relation::less_equal, 1, 3);
  claim.observables = {1};
  PointOutcome met, never;
  met.series = {{{{0, 0}, {0.9, 0}}}, {{{0, 0}, {0.2, 0}}}};
  never.series = {{{{0, 0}, {0.1, 0}}}, {}};
  ClaimTally tally;
  REQUIRE(tally_point(plan, claim, rows, met, tally));
  CHECK(conclude(claim, tally, false, false).verdict == Verdict::holds);
  ClaimTally narrowed = tally;
  REQUIRE(tally_point(plan, claim, rows, never, tally));
  const ClaimReport report = conclude(claim, tally, false, false);
  CHECK(report.verdict == Verdict::fails);
  CHECK(report.reason.find("no value at 1 of 2 places") != std::string::npos);
  claim.where = compare(Relation::greater, 0, 3);
  REQUIRE(tally_point(plan, claim, rows, never, narrowed));
  CHECK(conclude(claim, narrowed, false, false).verdict == Verdict::holds);
}
