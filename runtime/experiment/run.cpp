#include "runtime/experiment/run.h"

#include <algorithm>
#include <atomic>
#include <chrono>
#include <cmath>
#include <map>
#include <memory>
#include <nlohmann/json.hpp>
#include <set>

#include "lang/support/check.h"
#include "runtime/experiment/grid.h"
#include "runtime/experiment/points.h"
#include "runtime/experiment/reductions.h"
#include "runtime/experiment/run_record.h"
#include "runtime/experiment/tables.h"

namespace tarn::runtime {
namespace {

using Clock = std::chrono::steady_clock;

double seconds_since(Clock::time_point start) { return std::chrono::duration<double>(Clock::now() - start).count(); }

/// One experiment while it is run.
class Experiment {
 public:
  Experiment(std::span<const PlanAndKernel> plans, const RunOptions& options) : plans_(plans), options_(options) {
    report_.experiment = plans.front().plan.experiment;
    report_.any_plan = &plans.front().plan;
    for (const PlanAndKernel& each : plans) {
      models_.push_back(std::make_unique<PlanModel>(each.plan, each.kernel, each.tables));
      const std::uint32_t choice = choice_of(each.plan);
      for (const std::uint64_t index : each.plan.points) {
        grid_.push_back({index, row_of(each.plan, index, choice), models_.back().get()});
      }
    }
    std::sort(grid_.begin(), grid_.end(), [](const PointItem& a, const PointItem& b) { return a.row < b.row; });
    report_.grid = grid_.size();
  }

  Result<Done, FolderError> open_folder();
  void restore();
  void choose();
  void run();
  void judge_claims();
  void write();
  RunReport take_report() { return std::move(report_); }

 private:
  void keep(std::vector<PointOutcome> fresh);
  bool out_of_time() const {
    return options_.time_limit && !must_get_on_ && seconds_since(start_) > *options_.time_limit;
  }
  std::filesystem::path folder() const { return *options_.out / report_.experiment; }
  ClaimRows claim_rows(const Plan& plan, std::shared_ptr<Functions> functions) const;
  std::vector<Answer> answers_under(const Plan& plan, std::uint64_t index) const;

  std::span<const PlanAndKernel> plans_;
  const RunOptions& options_;
  Clock::time_point start_ = Clock::now();
  std::vector<std::unique_ptr<PlanModel>> models_;
  std::vector<PointItem> grid_;   ///< In grid order.
  std::vector<PointItem> items_;  ///< Those asked for, likewise.
  nlohmann::ordered_json key_;
  FolderContents contents_;
  std::map<std::uint64_t, PointOutcome> restored_;
  std::set<std::string> point_remarks_;
  std::atomic<bool> must_get_on_ = false;  ///< A point has to be done, whatever the limit.
  RunReport report_;
};

Result<Done, FolderError> Experiment::open_folder() {
  if (!options_.out) return Done{};
  key_ = run_key(plans_.front().plan, options_);
  auto contents = inspect_folder(folder(), key_);
  if (!contents) return Unexpected{contents.error()};
  contents_ = std::move(contents).value();
  return Done{};
}

/// Points that an earlier run left in the folder; tables that cannot be read are computed anew.
void Experiment::restore() {
  if (!contents_.contains("run.json")) return;
  const Recorded recorded = read_record(contents_.at("run.json"));
  must_get_on_ = recorded.stalled;
  ResultTables tables;
  for (const auto& [name, text] : contents_) {
    if (name == "run.json") continue;
    auto table = parse_csv(text);
    if (table) tables[name] = std::move(table).value();
  }
  std::vector<std::uint64_t> indices;
  std::vector<const Plan*> plan_of;
  for (const PointItem& item : grid_) {
    indices.push_back(item.index);
    plan_of.push_back(&item.model->plan());
  }
  auto read = read_tables(tables, indices, plan_of);
  if (!read) return;
  restored_ = std::move(read).value();
  for (const PointItem& item : grid_) {
    const auto found = restored_.find(item.row);
    if (found == restored_.end()) continue;
    Functions functions = item.model->functions_at(item.index);
    if (!complete_unlisted(item.model->plan(), functions, found->second)) restored_.erase(found);
  }
  if (restored_.empty()) return;
  for (auto& [index, outcome] : restored_) {
    const auto place = recorded.places.find(index);
    if (outcome.error && place != recorded.places.end()) outcome.error->place = place->second;
  }
  report_.counters = recorded.counters;
  report_.leakage = recorded.leakage;
  point_remarks_.insert(recorded.remarks.begin(), recorded.remarks.end());
  report_.reused = restored_.size();
}

/// The whole grid, or its sample with the rows that are there already: none is ever thrown away.
void Experiment::choose() {
  if (!options_.sample || grid_.empty()) {
    items_ = grid_;
  } else {
    std::set<std::uint64_t> chosen;
    std::vector<std::uint64_t> indices;
    for (const PointItem& item : grid_) {
      if (indices.empty() || indices.back() != item.index) indices.push_back(item.index);
    }
    for (const std::uint64_t i : sample_of_grid(indices.size(), std::max<std::uint64_t>(1, *options_.sample))) {
      chosen.insert(indices[i]);
    }
    for (const PointItem& item : grid_) {
      if (chosen.contains(item.index) || restored_.contains(item.row)) items_.push_back(item);
    }
  }
  report_.total = items_.size();
}

void Experiment::run() {
  std::vector<PointItem> missing;
  for (const PointItem& item : items_) {
    if (!restored_.contains(item.row)) missing.push_back(item);
  }
  PointsOptions points;
  points.jobs = std::max<std::size_t>(1, options_.jobs);
  points.interrupted = [this] { return (options_.interrupted && options_.interrupted()) || out_of_time(); };
  const Clock::time_point begun = Clock::now();
  points.progress = [&, this](std::size_t done, double under_way) {
    if (done > 0) must_get_on_ = false;
    if (!options_.progress) return;
    const double sum = static_cast<double>(done) + under_way;
    const double left = sum > 0 ? seconds_since(begun) / sum * (static_cast<double>(missing.size()) - sum) : NAN;
    options_.progress(report_.reused + done, report_.total, left);
  };
  std::vector<PointOutcome> fresh = run_points(missing, points);
  if (fresh.size() < missing.size()) {
    report_.ending = options_.interrupted && options_.interrupted() ? Ending::interrupted : Ending::out_of_time;
  }
  report_.fresh = fresh.size();
  keep(std::move(fresh));
}

void Experiment::keep(std::vector<PointOutcome> fresh) {
  for (PointOutcome& outcome : fresh) {
    report_.counters += outcome.counters;
    report_.leakage = std::max(report_.leakage, outcome.leakage);
    point_remarks_.insert(outcome.remarks.begin(), outcome.remarks.end());
    restored_.emplace(outcome.row, std::move(outcome));
  }
  for (const PointItem& item : items_) {
    const auto found = restored_.find(item.row);
    if (found == restored_.end()) continue;
    if (found->second.error) ++report_.failed;
    else if (found->second.status != kStatusOk) ++report_.loose;
    report_.points.push_back(std::move(found->second));
    report_.plan_of.push_back(&item.model->plan());
  }
  std::set<std::string> known;
  const auto add = [&](std::vector<std::string>& list, const std::string& text) {
    if (known.insert(text).second) list.push_back(text);
  };
  for (const PlanAndKernel& each : plans_) {
    for (const std::string& text : each.plan.left_out) add(report_.left_out, text);
    for (const std::string& text : each.plan.remarks) add(report_.remarks, text);
  }
  for (const std::string& text : point_remarks_) add(report_.remarks, text);
}

ClaimRows Experiment::claim_rows(const Plan& plan, std::shared_ptr<Functions> functions) const {
  return [&plan, functions](std::span<const double> observables, Instant at) {
    // Behind the plan's observables stand those under another equation.
    for (std::size_t o = 0; o < observables.size(); ++o) {
      const std::size_t count = plan.observables.size();
      const std::size_t slot = o < count ? plan.observable_slot + o : plan.under_slot + o - count;
      functions->set_input(static_cast<std::uint32_t>(slot), observables[o]);
    }
    return Result<std::vector<double>, RunError>(functions->values(kClaims, at.s, at.t));
  };
}

/// What Plan::under names, at one grid point; NaN where that equation has no answer there.
std::vector<Answer> Experiment::answers_under(const Plan& plan, std::uint64_t index) const {
  std::vector<Answer> answers;
  for (const Plan::Under& under : plan.under) {
    const std::uint64_t row = row_of(plan, index, under.choice);
    const auto found = std::lower_bound(report_.points.begin(), report_.points.end(), row,
                                        [](const PointOutcome& point, std::uint64_t wanted) { return point.row < wanted; });
    const bool there = found != report_.points.end() && found->row == row && !found->series.empty() &&
                       !found->series[under.observable].empty();
    answers.push_back(there ? found->series[under.observable].front().answer : Answer{});
  }
  return answers;
}

void Experiment::judge_claims() {
  const std::vector<Claim>& claims = plans_.front().plan.claims;
  std::vector<ClaimTally> tallies(claims.size());
  std::map<const Plan*, const PlanModel*> model_of;
  for (const auto& model : models_) model_of[&model->plan()] = model.get();
  for (std::size_t i = 0; i < report_.points.size(); ++i) {
    const Plan& plan = *report_.plan_of[i];
    const auto functions = std::make_shared<Functions>(model_of.at(&plan)->functions_at(report_.points[i].index));
    const ClaimRows rows = claim_rows(plan, functions);
    const std::vector<Answer> under = answers_under(plan, report_.points[i].index);
    for (std::size_t c = 0; c < claims.size(); ++c) {
      if (plan.claims[c].under_all && choice_of(plan) != 0) continue;
      TARN_CHECK(tally_point(plan, plan.claims[c], rows, report_.points[i], tallies[c], under));
    }
  }
  const bool sampled = report_.total < report_.grid;
  for (std::size_t c = 0; c < claims.size(); ++c) {
    report_.claims.push_back(conclude(claims[c], tallies[c], sampled, report_.ending != Ending::finished));
  }
}

void Experiment::write() {
  report_.seconds = seconds_since(start_);
  if (!options_.out) return;
  std::vector<const PointOutcome*> points;
  for (const PointOutcome& point : report_.points) points.push_back(&point);
  FolderContents files;
  for (const auto& [name, table] : make_tables(points, report_.plan_of, *report_.any_plan)) files[name] = to_csv(table);
  files["run.json"] = run_record(report_, key_, options_);
  const auto written = write_folder(folder(), files);
  if (!written) report_.not_written = written.error();
}

}  // namespace

Result<Done, FolderError> judge_folder(std::span<const PlanAndKernel> plans, const RunOptions& options) {
  TARN_CHECK(!plans.empty());
  if (!options.out) return Done{};
  const Plan& plan = plans.front().plan;
  const auto contents = inspect_folder(*options.out / plan.experiment, run_key(plan, options));
  if (!contents) return Unexpected{contents.error()};
  return Done{};
}

Result<RunReport, FolderError> run_experiment(std::span<const PlanAndKernel> plans, const RunOptions& options) {
  TARN_CHECK(!plans.empty());
  Experiment experiment(plans, options);
  const auto opened = experiment.open_folder();
  if (!opened) return Unexpected{opened.error()};
  experiment.restore();
  experiment.choose();
  experiment.run();
  experiment.judge_claims();
  experiment.write();
  return experiment.take_report();
}

int exit_status(const RunReport& report) {
  if (report.not_written) return 2;
  if (report.failed > 0 || report.ending != Ending::finished) return 3;
  const bool claim_failed = std::any_of(report.claims.begin(), report.claims.end(), [](const ClaimReport& claim) {
    return claim.verdict == Verdict::fails;
  });
  return claim_failed ? 1 : 0;
}

}  // namespace tarn::runtime
