#include "runtime/trajectories/trajectories.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <optional>
#include <vector>

#include "lang/support/check.h"
#include "runtime/equation/propagate_pieces.h"
#include "runtime/trajectories/draws.h"
#include "runtime/trajectories/shared_work.h"
#include "runtime/trajectories/survival.h"

namespace tarn::runtime {
namespace {

using Index = Eigen::Index;

/// Trajectories that one thread takes at a time.
constexpr std::size_t kBlock = 16;
constexpr int kMostTrials = 200;

struct Trajectory {
  std::uint64_t number = 0;
  Ket psi;                 ///< Its squared norm is the chance that no jump came since the last.
  double threshold = 0;    ///< At this squared norm the next one comes.
  std::uint32_t drawn = 0;
};

/// One thread's work on one stretch.
class Walker {
 public:
  Walker(const Unravelling& model, const Piece& piece, const Survival& maps, const SurvivalOptions& options, std::uint64_t seed)
      : model_(model), piece_(piece), maps_(maps), options_(options), seed_(seed) {}

  std::optional<Failure> cross(Trajectory& x) {
    const std::size_t cells = std::size_t{1} << static_cast<unsigned>(maps_.depth());
    for (std::size_t cell = 0; cell < cells;) {
      if (options_.interrupted && options_.interrupted()) return Failure{FailureKind::interrupted, maps_.begin_of(cell)};
      if (const std::size_t passed = survive_from(x, cell); passed > 0) {
        cell += passed;
        continue;
      }
      if (const auto failure = cross_cell(x, cell)) return failure;
      ++cell;
    }
    return std::nullopt;
  }

  Counters counters;
  std::uint64_t jumps = 0;

 private:
  /// Takes the longest run of cells from `cell` on that has a map and no jump; the number of its cells.
  std::size_t survive_from(Trajectory& x, std::size_t cell) {
    int level = maps_.depth();
    std::size_t k = cell;
    for (; level > 0 && k % 2 == 0; --level) k /= 2;
    for (; level <= maps_.depth(); ++level, k *= 2) {
      image_.noalias() = maps_.over(level, k) * x.psi;
      if (!(image_.squaredNorm() >= x.threshold)) continue;
      x.psi.swap(image_);
      return std::size_t{1} << static_cast<unsigned>(maps_.depth() - level);
    }
    return 0;
  }

  /// Through a cell at the end of which the norm is known to be below the threshold.
  std::optional<Failure> cross_cell(Trajectory& x, std::size_t cell) {
    double t = maps_.begin_of(cell);
    const double end = maps_.begin_of(cell + 1);
    for (;;) {
      if (const auto failure = go_to_jump(x, t, end)) return failure;
      if (const auto failure = jump(x, t)) return failure;
      if (t >= end) return std::nullopt;
      image_ = x.psi;
      if (const auto failure = survive(model_, piece_, t, end, options_, image_, counters)) return failure;
      if (!std::isfinite(image_.squaredNorm())) return Failure{FailureKind::not_finite, t};
      if (image_.squaredNorm() < x.threshold) continue;
      x.psi.swap(image_);
      return std::nullopt;
    }
  }

  /// Moves to where the squared norm falls to the threshold: Newton's method for its logarithm, held within what
  /// is known. Every trial is integrated from the last state above the threshold.
  std::optional<Failure> go_to_jump(Trajectory& x, double& t, double end) {
    double left = t, right = end, at = t;
    Ket state = x.psi;
    const double accuracy = std::max(options_.tolerance, 1e-14);
    for (int trial = 0; trial < kMostTrials; ++trial) {
      if (!model_.drift(piece_.s_at(at), at, drift_)) return Failure{FailureKind::not_finite, at};
      const double norm = state.squaredNorm();
      const double above = std::log(norm / x.threshold);
      const double rate = -2 * state.dot(drift_ * state).real() / norm;
      double next = at + above / rate;
      if (std::abs(above) <= accuracy) break;
      if (above > 0) {
        left = at;
        x.psi = state;
      } else {
        right = at;
      }
      if (right - left <= 1e-15 * end) break;
      if (!(next > left && next < right)) next = 0.5 * (left + right);
      if (!(next > left && next < right)) break;
      state = x.psi;
      if (const auto failure = survive(model_, piece_, left, next, options_, state, counters)) return failure;
      at = next;
    }
    x.psi = state;
    t = at;
    return std::nullopt;
  }

  std::optional<Failure> jump(Trajectory& x, double t) {
    model_.jumps(piece_.s_at(t), t, x.psi, images_);
    const Eigen::VectorXd weights = images_.images.colwise().squaredNorm().transpose();
    const double total = weights.sum();
    if (!std::isfinite(total)) return Failure{FailureKind::not_finite, t};
    const double pick = draw(x) * total;
    // Without a rate the norm has fallen by rounding alone: nothing happens.
    if (total > 0) {
      Index chosen = 0;
      double sum = weights[0];
      while (chosen + 1 < weights.size() && sum <= pick) sum += weights[++chosen];
      while (weights[chosen] <= 0) --chosen;
      if (images_.basis.size() == 0) x.psi = images_.images.col(chosen);
      else x.psi.noalias() = images_.basis * images_.images.col(chosen);
      ++jumps;
    }
    x.psi.normalize();
    x.threshold = draw(x);
    return std::nullopt;
  }

  double draw(Trajectory& x) { return uniform_draw(seed_, DrawPurpose::trajectory, x.number, x.drawn++); }

  const Unravelling& model_;
  const Piece& piece_;
  const Survival& maps_;
  const SurvivalOptions& options_;
  std::uint64_t seed_;
  Ket image_;
  Eigen::MatrixXcd drift_;
  JumpImages images_;
};

class Propagation {
 public:
  Propagation(const Unravelling& model, const TrajectoryRun& run, const VisitTrajectory& visit, const Interrupted& interrupted)
      : model_(model), run_(run), visit_(visit), state_(Ket()) {
    options_ = {run.tolerance, run.timeline->duration(), run.jobs, interrupted};
    for (const double t : run.times) times_.push_back(std::clamp(t, 0.0, run.timeline->duration()));
    start();
  }

  Result<TrajectoryCounters, RunError> run() {
    report_until(0);
    for (const Piece& piece : cut_pieces(*run_.timeline, run_.breaks, model_.reads_t)) {
      if (const auto failure = cross(piece)) return Unexpected{run_error(*failure)};
    }
    report_until(options_.duration);
    return counters_;
  }

 private:
  void start() {
    const double shared = uniform_draw(run_.seed, DrawPurpose::start, 0, 0);
    std::size_t row = 0;
    double sum = run_.weights[0];
    for (std::size_t i = 0; i < run_.count; ++i) {
      const double place = (static_cast<double>(i) + shared) / static_cast<double>(run_.count);
      while (row + 1 < run_.weights.size() && sum <= place) sum += run_.weights[++row];
      all_.push_back({i, run_.kets[row], uniform_draw(run_.seed, DrawPurpose::trajectory, i, 0), 1});
    }
  }

  std::optional<Failure> cross(const Piece& piece) {
    const auto rate = rate_of(model_, piece, piece.t0, piece.t1);
    if (!rate) return Failure{FailureKind::not_finite, piece.t0};
    double from = piece.t0;
    const auto go_to = [&](double t) -> std::optional<Failure> {
      const CellPlan cells = plan_cells(piece, t - from, *rate, model_.dimension);
      const double begin = from;
      for (std::size_t part = 1; part <= cells.parts; ++part) {
        const double to = part == cells.parts ? t : begin + (t - begin) * (static_cast<double>(part) / static_cast<double>(cells.parts));
        if (const auto failure = cross_stretch(piece, from, to, cells.depth)) return failure;
        from = to;
      }
      return std::nullopt;
    };
    for (std::size_t k = next_; k < times_.size() && times_[k] < piece.t1; ++k) {
      if (times_[k] <= from) continue;
      if (const auto failure = go_to(times_[k])) return failure;
      report_until(times_[k]);
    }
    if (const auto failure = go_to(piece.t1)) return failure;
    report_until(piece.t1);
    return std::nullopt;
  }

  std::optional<Failure> cross_stretch(const Piece& piece, double t0, double t1, int depth) {
    if (maps_.serves(piece, t0, t1)) {
      maps_.move_to(t0);
    } else if (const auto failure = maps_.make(model_, piece, t0, t1, depth, options_, counters_.steps)) {
      return failure;
    }
    const std::size_t blocks = (all_.size() + kBlock - 1) / kBlock;
    std::vector<std::optional<Failure>> failures(blocks);
    std::vector<TrajectoryCounters> counts(blocks);
    share_work(blocks, run_.jobs, [&](std::size_t b) {
      Walker walker(model_, piece, maps_, options_, run_.seed);
      for (std::size_t i = b * kBlock; i < std::min(all_.size(), (b + 1) * kBlock) && !failures[b]; ++i)
        failures[b] = walker.cross(all_[i]);
      counts[b] = {walker.counters, walker.jumps};
    });
    for (const TrajectoryCounters& count : counts) {
      counters_.steps += count.steps;
      counters_.jumps += count.jumps;
    }
    for (const auto& failure : failures)
      if (failure) return failure;
    return std::nullopt;
  }

  void report_until(double t) {
    for (; next_ < times_.size() && times_[next_] <= t; ++next_)
      for (std::size_t i = 0; i < all_.size(); ++i) {
        std::get<Ket>(state_) = all_[i].psi.normalized();
        visit_(next_, i, state_);
      }
  }

  const Unravelling& model_;
  const TrajectoryRun& run_;
  const VisitTrajectory& visit_;
  SurvivalOptions options_;
  std::vector<double> times_;
  std::size_t next_ = 0;
  std::vector<Trajectory> all_;
  State state_;
  Survival maps_;
  TrajectoryCounters counters_;
};

}  // namespace

Result<TrajectoryCounters, RunError> propagate_trajectories(const Unravelling& model, const TrajectoryRun& run,
                                                            const VisitTrajectory& visit, const Interrupted& interrupted) {
  TARN_CHECK(run.count > 0 && !run.kets.empty() && run.kets.size() == run.weights.size());
  TARN_CHECK(std::is_sorted(run.times.begin(), run.times.end()));
  for (const Ket& ket : run.kets) TARN_CHECK(ket.size() == model.dimension);
  return Propagation(model, run, visit, interrupted).run();
}

}  // namespace tarn::runtime
