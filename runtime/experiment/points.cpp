#include "runtime/experiment/points.h"

#include <algorithm>
#include <atomic>
#include <chrono>
#include <exception>
#include <map>
#include <memory>
#include <mutex>
#include <optional>
#include <thread>

#include "runtime/experiment/equation_points.h"

namespace tarn::runtime {
namespace {

constexpr std::size_t kMostGroup = 8;
constexpr std::chrono::milliseconds kBetweenShares{200};

/// Points that run together, by their position in the list.
using Group = std::vector<std::size_t>;

/// An observable whose moment never comes has no value; its point is marked.
void mark_moments_never_met(const Plan& plan, PointOutcome& outcome) {
  if (outcome.error || outcome.status != kStatusOk) return;
  for (std::size_t o = 0; o < plan.observables.size(); ++o) {
    if (names_moment(plan.observables[o]) && lacks_value(outcome.series[o])) outcome.status = kStatusNotMet;
  }
}

class Pool {
 public:
  Pool(std::span<const PointItem> items, const PointsOptions& options) : items_(items), options_(options) {
    for (const PointItem& item : items) {
      if (!equations_[item.model]) equations_[item.model] = std::make_unique<EquationPoints>(*item.model, options.jobs + 1);
    }
    make_groups();
    outcomes_.resize(items.size());
  }

  std::vector<PointOutcome> run() {
    std::vector<std::thread> helpers;
    const std::size_t threads = std::min(options_.jobs, groups_.size());
    for (std::size_t j = 1; j < threads; ++j) helpers.emplace_back([this] { work(); });
    work();
    for (std::thread& helper : helpers) helper.join();
    if (failure_) std::rethrow_exception(failure_);
    std::vector<PointOutcome> finished;
    for (auto& outcome : outcomes_) {
      if (outcome) finished.push_back(std::move(*outcome));
    }
    return finished;
  }

 private:
  void make_groups();
  void work();
  void run_group(const Group& group);
  void note_share(double& noted, double share);
  bool stopped() const { return stop_ || (options_.interrupted && options_.interrupted()); }

  std::span<const PointItem> items_;
  const PointsOptions& options_;
  std::map<const PlanModel*, std::unique_ptr<EquationPoints>> equations_;
  std::vector<Group> groups_;
  std::vector<std::optional<PointOutcome>> outcomes_;
  std::atomic<std::size_t> next_ = 0;
  std::atomic<bool> stop_ = false;
  std::mutex reporting_;
  std::size_t done_ = 0;
  double shares_ = 0;  ///< Of points under way.
  std::chrono::steady_clock::time_point told_ = std::chrono::steady_clock::now();
  std::exception_ptr failure_;
};

/// Consecutive points of one plan share the lanes. Points of equations in levels are put in an order
/// in which those of one chip follow each other, whatever the axes are.
void Pool::make_groups() {
  std::map<std::pair<const PlanModel*, std::vector<double>>, std::vector<Group>> by_track;
  std::vector<std::pair<const PlanModel*, std::vector<double>>> order;
  for (std::size_t i = 0; i < items_.size(); ++i) {
    const PlanModel* model = items_[i].model;
    if (equations_.at(model)->shares_levels()) {
      const Functions functions = model->functions_at(items_[i].index);
      const std::pair key(model, levels_key(model->plan(), functions, functions.values(kSettings, 0, 0)));
      if (!by_track.contains(key)) order.push_back(key);
      by_track[key].push_back({i});
      continue;
    }
    const std::size_t most = std::min(model->lanes(), kMostGroup);
    const bool joins = !groups_.empty() && groups_.back().size() < most && items_[groups_.back().front()].model == model;
    if (joins) groups_.back().push_back(i);
    else groups_.push_back({i});
  }
  for (const auto& key : order) {
    for (Group& group : by_track[key]) groups_.push_back(std::move(group));
  }
}

void Pool::work() {
  try {
    for (;;) {
      const std::size_t group = next_++;
      if (group >= groups_.size() || stopped()) return;
      run_group(groups_[group]);
    }
  } catch (...) {
    const std::scoped_lock lock(reporting_);
    if (!failure_) failure_ = std::current_exception();
    stop_ = true;
  }
}

/// The share of one point that is done; `noted` is what shares_ holds of it.
void Pool::note_share(double& noted, double share) {
  if (!options_.progress) return;
  const std::scoped_lock lock(reporting_);
  shares_ += share - noted;
  noted = share;
  const auto now = std::chrono::steady_clock::now();
  if (now - told_ < kBetweenShares) return;
  told_ = now;
  options_.progress(done_, shares_);
}

void Pool::run_group(const Group& group) {
  const Interrupted interrupted = [this] { return stopped(); };
  std::vector<double> shares(group.size(), 0.0);
  const PlanModel& model = *items_[group.front()].model;
  std::vector<std::unique_ptr<PointTask>> owned;
  std::vector<PointTask*> tasks;
  for (const std::size_t i : group) {
    const auto share = [this, &noted = shares[owned.size()]](double now) { note_share(noted, now); };
    owned.push_back(std::make_unique<PointTask>(model, items_[i].index, Watch{interrupted, share, equations_.at(&model)->generator(interrupted)}));
    tasks.push_back(owned.back().get());
  }
  equations_.at(&model)->advance(tasks, interrupted);
  const std::scoped_lock lock(reporting_);
  for (std::size_t k = 0; k < group.size(); ++k) {
    shares_ -= shares[k];
    PointOutcome outcome = tasks[k]->take_outcome();
    if (outcome.error && outcome.error->kind == "interrupted") continue;
    outcome.row = items_[group[k]].row;
    mark_moments_never_met(model.plan(), outcome);
    outcomes_[group[k]] = std::move(outcome);
    ++done_;
  }
  if (options_.progress) options_.progress(done_, shares_);
}

}  // namespace

std::vector<PointOutcome> run_points(std::span<const PointItem> items, const PointsOptions& options) {
  return Pool(items, options).run();
}

}  // namespace tarn::runtime
