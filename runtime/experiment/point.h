#pragma once
/// \file One grid point from its parameters to its answers. The propagation itself is done by
/// others (advance.h), at the tolerance this asks for, as often as it asks.

#include <functional>
#include <memory>
#include <optional>
#include <set>
#include <span>
#include <string>
#include <vector>

#include "runtime/experiment/accuracy.h"
#include "runtime/experiment/begin.h"
#include "runtime/experiment/generator_at.h"
#include "runtime/experiment/observations.h"
#include "runtime/experiment/plan_model.h"
#include "runtime/experiment/point_verdict.h"

namespace tarn::runtime {

/// Who looks on while a point is run. Both may be empty.
struct Watch {
  Interrupted interrupted;
  std::function<void(double)> share;  ///< Told what share of a scan is done, place by place.
  GeneratorAt generator = {};         ///< Of the plan's equation.
};

class PointTask {
 public:
  /// Works out pace, observations, levels and the state at the beginning. What fails is in the
  /// outcome.
  PointTask(const PlanModel& model, std::uint64_t index, Watch watch);
  PointTask(const PointTask&) = delete;
  PointTask& operator=(const PointTask&) = delete;

  /// True while another propagation is wanted, at tolerance().
  bool wants_run() const { return wants_run_; }
  double tolerance() const { return tolerance_; }

  const PlanModel& model() const { return model_; }
  Functions& functions() { return functions_; }
  double input(std::uint32_t slot) const { return functions_.input(slot); }
  std::span<const double> settings() const { return settings_; }
  const Timeline& timeline() const { return timeline_; }
  std::span<const double> breaks() const { return breaks_; }       ///< [ns], ascending.
  std::span<const double> positions() const { return positions_; } ///< The same kinks in s.
  std::span<const double> times() const { return times_; }         ///< [ns], ascending.
  const Mixture& begin() const { return begin_; }
  /// The run begins in the equation's stationary state. Where Watch::generator has none, who propagates finds it,
  /// and begin() is empty.
  bool begins_steady() const { return std::holds_alternative<BeginSteady>(*plan_.begin); }

  /// A run: begin_run(), then visit() for every ket of the mixture or for the density matrix
  /// (weight 1), then end_run(). `index` counts times().
  void begin_run();
  void visit(std::size_t index, const State& state, double weight);
  void end_run(const Counters& counters);

  /// For runs that say themselves what they are to be held against: after the visits of a coarser run,
  /// end_coarser_run(); after those of the best one, end_best_run(). `shared`: at each of times(), an
  /// error of the state that all have in common; `last`: there is no better run to be had.
  void end_coarser_run(Weights weights);
  void end_best_run(const Counters& counters, std::span<const double> shared, bool last);

  /// An error of the state, in the Frobenius norm, that all runs have in common.
  void note_floor(double floor) { floor_ = floor; }

  void fail(RunError error);
  /// Population that left the levels kept, an upper estimate.
  void note_leakage(double leakage) { outcome_.leakage = leakage; }
  void remark(std::string text) { outcome_.remarks.push_back(std::move(text)); }

  /// Precondition: no run is wanted. The task is used up.
  PointOutcome take_outcome();

 private:
  Result<Done, RunError> prepare();
  Result<Done, RunError> find_begin();
  Result<Done, RunError> prepare_observations();
  void note_held_offsets();
  void note_lacking(const InstantReadings& readings, double s);
  Result<InstantReadings, RunError> make_readings(const Observation& observation);
  Result<double, RunError> verdict_until(Instant at);
  const InstantReadings* readings_of(std::size_t observation);
  double largest_phase() const;
  std::vector<Measured> readings_with_errors(std::size_t observation) const;
  std::vector<Comparison> comparisons(std::size_t observation) const;
  void collect_answers();
  Answer answer_of(std::size_t observation, std::uint32_t observable);
  double worst_excess() const;
  double limit_of(std::uint32_t observable, std::size_t sample) const;
  Result<double, RunError> find_width(const Observation& observation);
  void finish(const char* status);

  const PlanModel& model_;
  const Plan& plan_;
  Watch watch_;
  Functions functions_;
  ChipLevels levels_;
  std::vector<double> settings_;
  Timeline timeline_;
  std::vector<double> positions_, breaks_, times_;
  std::vector<Observation> observations_;
  std::vector<std::vector<std::size_t>> at_time_;  ///< Observations at each of times_.
  std::vector<std::optional<InstantReadings>> readings_;
  std::set<std::string> lacking_;                  ///< Why readings had no value so far.
  std::vector<std::vector<double>> norms_;         ///< Of the readings, at each observation.
  std::vector<double> widths_;                     ///< Of the spectrum, where a tolerance asks for it.
  std::vector<std::vector<std::size_t>> places_;   ///< Observations of each observable.
  std::optional<Target> target_;
  Mixture begin_;

  std::vector<ReadingSums> sums_;
  /// A run that is less accurate than fine_, at every observation.
  struct CoarserRun {
    std::vector<Snapshot> snapshots;
    Weights weights;
  };
  std::vector<Snapshot> fine_;
  std::vector<CoarserRun> coarser_;
  double rounding_ = 0;                            ///< Of coherences, by the phase they have gathered.
  std::vector<double> shared_;                     ///< Error of the state at each observation that all runs share.
  double floor_ = 0;
  std::optional<PointVerdict> judged_;             ///< Of the equation, where a reading asks.
  double tolerance_ = 0;
  bool wants_run_ = false;
  PointOutcome outcome_;
};

}  // namespace tarn::runtime
