#pragma once
/// \file Levels of a chip, tracked once along s and shared by every anneal time, temperature,
/// bath strength, pace and equation.
///
/// A track has base nodes, close enough together for every rotation between neighbours to be small
/// and every avoided crossing to be resolved, and under each base interval dyadic refinements
/// that are made when asked for. What they hold depends on the chip alone, so that threads
/// which share a track get the same bits in any order.

#include <Eigen/Core>
#include <cstddef>
#include <functional>
#include <memory>
#include <optional>
#include <vector>

#include "runtime/levels/budget.h"
#include "runtime/levels/family.h"
#include "runtime/levels/groups.h"
#include "runtime/levels/kept.h"
#include "runtime/levels/link.h"

namespace tarn::runtime {

struct TrackOptions {
  double s_min = 0, s_max = 1;
  Eigen::Index levels = 0;     ///< Levels asked for; 0 means all.
  double max_rotation = 0.15;  ///< Largest element of a rotation between base nodes [rad].
  int initial_intervals = 16;
  int max_intervals = 20000;
  std::shared_ptr<MemoryBudget> memory = {};  ///< For refinements; none: as much as they take.
  std::function<bool()> interrupted = {};  ///< True ends the refinement: the track is then of no use.
};

/// A step from one frame to the next through the frame at its middle.
template <class Scalar>
struct StepFrames {
  Frame<Scalar> middle;
  Link<Scalar> first, second;  ///< Start to middle, middle to end.
  FrequencyGroups groups;      ///< Frequencies that coincide throughout, labels of `middle`.
};

/// Builds a step between any two frames of the same chip.
template <class Scalar>
StepFrames<Scalar> make_step(const LevelModel<Scalar>& model, const Frame<Scalar>& start,
                             const Frame<Scalar>& end, double tolerance);

/// <a|A_c|b> among the levels of a frame, K x K.
template <class Scalar>
Matrix<Scalar> coupling_elements(const LevelModel<Scalar>& model, std::size_t coupling, const Frame<Scalar>& frame);

/// The equal steps of a stretch, in the order of rising s.
template <class Scalar>
using Steps = std::vector<StepFrames<Scalar>>;

/// Steps with the frames at their ends, one more than steps; valid as long as this is.
template <class Scalar>
struct Stretch {
  std::shared_ptr<const Steps<Scalar>> steps;
  std::vector<const Frame<Scalar>*> frames;
  std::vector<std::shared_ptr<const Steps<Scalar>>> owners;  ///< Of the frames between.
};

/// Immutable to its users; safe to share between threads.
template <class Scalar>
class Track {
 public:
  static constexpr int kMaxDepth = 14;

  Track(LevelModel<Scalar> model, const TrackOptions& options);
  const LevelModel<Scalar>& model() const { return model_; }
  /// Levels kept: at least those asked for, enlarged where the cut would fall into a manifold.
  Eigen::Index levels() const { return levels_; }
  /// E_max - E_min of the kept levels, the largest along s [rad/ns].
  double width() const { return width_; }
  /// 1e-8 of the width: closer frequencies count as coinciding.
  double tolerance() const { return 1e-8 * width_; }
  /// Bound on the error of every energy kept at a base node [rad/ns].
  double energy_error() const { return energy_error_; }
  /// True if every avoided crossing seen was resolved within `max_intervals`.
  bool resolved() const { return resolved_; }

  std::size_t intervals() const { return nodes_.size() - 1; }
  const std::vector<Frame<Scalar>>& nodes() const { return nodes_; }
  /// The 2^depth equal steps of a base interval, whose first and last frame are nodes(); kept while there is memory,
  /// else made anew each time. Without steps if `interrupted` before they were made.
  Stretch<Scalar> stretch(std::size_t interval, int depth, const std::function<bool()>& interrupted = {}) const;
  /// Levels at any s within the range; not cached. Energies ascend.
  Frame<Scalar> at(double s) const { return model_.solve(s, levels_); }
  /// Index of the base interval that holds s.
  std::size_t interval_of(double s) const;

 private:
  using Refinements = KeptByDepth<Steps<Scalar>, kMaxDepth>;
  std::optional<Steps<Scalar>> make_steps(const Stretch<Scalar>& stretch, const std::function<bool()>& interrupted) const;

  LevelModel<Scalar> model_;
  Eigen::Index levels_ = 0;
  double width_ = 0, energy_error_ = 0;
  bool resolved_ = true;
  std::vector<Frame<Scalar>> nodes_;
  std::vector<std::unique_ptr<Refinements>> refinements_;  ///< Of each base interval.
};

}  // namespace tarn::runtime
