#include "runtime/experiment/notices.h"

#include <fmt/format.h>

#include <algorithm>
#include <map>
#include <tuple>

#include "runtime/experiment/summary.h"

namespace tarn::runtime {
namespace {

std::string of_points(std::uint64_t some, std::uint64_t all) {
  return all == 1 ? "" : fmt::format(" (at {} of {} points)", some, all);
}

/// The last `; ...` of a message says what would mend it.
std::pair<std::string, std::string> text_and_remedy(const std::string& message) {
  const std::size_t mark = message.rfind("; ");
  if (mark == std::string::npos) return {message, ""};
  return {message.substr(0, mark), message.substr(mark + 2)};
}

void add_failures(const RunReport& report, std::vector<Notice>& notices) {
  using Failure = std::tuple<std::string, std::string, std::string, std::uint32_t, std::uint32_t>;
  std::vector<std::pair<const RunError*, std::uint64_t>> failures;  // in grid order
  std::map<Failure, std::size_t> known;
  for (const PointOutcome& point : report.points) {
    if (!point.error) continue;
    const Place& at = point.error->place;
    const Failure failure{point.error->kind, point.error->message, at.file, at.line, at.column};
    const auto [row, fresh] = known.try_emplace(failure, failures.size());
    if (fresh) failures.emplace_back(&*point.error, 0);
    ++failures[row->second].second;
  }
  for (const auto& [error, count] : failures) {
    const auto [text, remedy] = text_and_remedy(error->message);
    notices.push_back({error->kind, text + of_points(count, report.total), remedy, Gravity::error, error->place});
  }
}

void add_marks(const RunReport& report, std::vector<Notice>& notices) {
  const auto add = [&](const char* status, const char* kind, const char* text, const char* remedy) {
    const auto count = static_cast<std::uint64_t>(std::count_if(
        report.points.begin(), report.points.end(), [&](const PointOutcome& point) { return point.status == status; }));
    if (count == 0) return;
    notices.push_back({kind, text + of_points(count, report.total), remedy, Gravity::warning});
  };
  add(kStatusLoose, "tolerance_not_reached", "an answer's error stayed above the tolerance asked",
      "trust the answer to its error, or ask for a larger `tolerance`");
  add(kStatusNotFinite, "answer_not_finite", "an answer is not a finite number",
      "look for a division by zero in the observable");
}

void add_moments(const RunReport& report, std::vector<Notice>& notices) {
  const Plan& plan = *report.any_plan;
  for (std::size_t o = 0; o < plan.observables.size(); ++o) {
    if (!names_moment(plan.observables[o])) continue;
    const auto count = std::count_if(report.points.begin(), report.points.end(), [&](const PointOutcome& point) {
      return !point.error && point.status != kStatusNotFinite && lacks_value(point.series[o]);
    });
    if (count == 0) continue;
    notices.push_back({"moment_never_met",
                       fmt::format("`{}` has no value, as its moment never comes{}", plan.observables[o].name,
                                   of_points(static_cast<std::uint64_t>(count), report.total)),
                       "observe it at a moment within the pace, or `at end`", Gravity::warning, plan.observables[o].place});
  }
}

void add_ending(const RunReport& report, std::vector<Notice>& notices) {
  if (report.ending == Ending::finished) return;
  const bool interrupted = report.ending == Ending::interrupted;
  notices.push_back({interrupted ? "interrupted" : "out_of_time",
                     fmt::format("{}: {} of {} points are done", interrupted ? "interrupted" : "out of time",
                                 report.points.size(), report.total),
                     !interrupted && report.fresh == 0 ? "the same command, given again, takes the time that one point needs"
                                                       : "the same command goes on from here",
                     Gravity::error});
}

/// Qubits of a long chain leave out the same thing each: the first and how many more.
void add_left_out(const RunReport& report, std::vector<Notice>& notices) {
  std::map<std::string, std::vector<std::string>> by_word;
  for (const std::string& line : report.left_out) by_word[line.substr(0, line.find(' '))].push_back(line);
  for (const auto& [word, lines] : by_word) {
    const std::string more = lines.size() > 1 ? fmt::format(" and {} more", lines.size() - 1) : "";
    notices.push_back({"left_out", fmt::format("the equation leaves out {}{}", lines.front(), more), "", Gravity::remark});
  }
}

}  // namespace

std::vector<Notice> notices_of(const RunReport& report) {
  std::vector<Notice> notices;
  add_failures(report, notices);
  add_marks(report, notices);
  add_moments(report, notices);
  add_left_out(report, notices);
  for (const std::string& remark : report.remarks) notices.push_back({"run_remark", remark, "", Gravity::remark});
  if (report.leakage > 0) {
    notices.push_back({"population_left",
                       report.leakage < 1 ? fmt::format("levels that are left out would take up to {:.2g} of the population", report.leakage)
                                          : "levels that are left out would take all of the population",
                       "keep more `levels`", Gravity::remark});
  }
  add_ending(report, notices);
  if (report.not_written) {
    notices.push_back({report.not_written->kind, report.not_written->message, report.not_written->remedy, Gravity::error});
  }
  return notices;
}

std::vector<Notice> failed_claims(const RunReport& report) {
  std::vector<Notice> notices;
  for (const ClaimReport& claim : report.claims) {
    if (claim.verdict == Verdict::holds) continue;
    const bool fails = claim.verdict == Verdict::fails;
    notices.push_back({fails ? "claim_fails" : "claim_undecided", claim_text(claim, *report.any_plan), "",
                       fails ? Gravity::error : Gravity::remark, claim.place});
  }
  return notices;
}

}  // namespace tarn::runtime
