#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

#include "lang/support/check.h"
#include "runtime/equation/davies.h"
#include "runtime/equation/davies_explicit.h"
#include "runtime/equation/davies_step.h"

namespace tarn::runtime {

using Complex = std::complex<double>;

namespace {

constexpr double kOfExchange = 3;          ///< Error of a population over what exchange moved at most.
constexpr double kDephasing = 0.5;        ///< Largest decay of a rotating pair in a step.
constexpr double kRotationCounts = 0.02;  ///< Rotations of a base interval below it do not ask for that.

/// One pass: the state walks the timeline and leaves copies at the times wanted.
template <class Scalar>
class Walk {
 public:
  Walk(const DaviesTables<Scalar>& tables, const DaviesRun& run, int depth, const DaviesOptions& options, bool explicitly)
      : tables_(tables), track_(tables.track()), run_(run), depth_(depth), options_(options), explicitly_(explicitly) {}

  /// The pass, or why it ended early.
  Result<DaviesPass, RunError> walk() {
    const auto& timeline = run_.timeline;
    enter(track_.at(timeline.segments.empty() ? timeline.first_s : timeline.segments.front().s0), run_.initial);
    emit_until(0.0);
    for (const Segment& segment : timeline.segments) {
      if (frame_.s != segment.s0) enter(track_.at(segment.s0), lab());
      if (explicitly_)
        explicit_segment(segment);
      else if (segment.s0 == segment.s1)
        hold(segment);
      else
        ramp(segment);
      if (failure_) return Unexpected{*failure_};
    }
    if (timeline.last_s != frame_.s) enter(track_.at(timeline.last_s), lab());
    emit_until(timeline.duration());
    pass_.leakage += coherent_leak_;
    return std::move(pass_);
  }

 private:
  /// A stretch of a ramp inside one base interval, in the direction walked.
  struct Piece {
    std::size_t interval;
    double s0, s1, t0, t1;
    bool whole;  ///< The complete interval: its steps are cached.
  };

  Density lab() const { return frame_.vectors.template cast<Complex>() * rho_ * frame_.vectors.adjoint().template cast<Complex>(); }

  void enter(Frame<Scalar> frame, const Density& state) {
    frame_ = std::move(frame);
    at_node_ = nullptr;
    ++pass_.counters.decompositions;
    const Matrix<Complex> vectors = frame_.vectors.template cast<Complex>();
    rho_ = vectors.adjoint() * state * vectors;
    if (vectors.cols() < vectors.rows()) pass_.leakage += std::max(0.0, std::real(state.trace() - rho_.trace()));
  }

  /// Asked before every step; the walk fails with it.
  bool stopped() {
    if (failure_) return true;
    if (options_.interrupted && options_.interrupted()) fail_as_interrupted();
    return failure_.has_value();
  }
  void fail_as_interrupted() { failure_ = RunError{"interrupted", "stopped before the end"}; }

  bool wanted_before(double t) const { return next_ < run_.times.size() && run_.times[next_] < t; }

  /// Leaves the present state for every time up to t.
  void emit_until(double t) {
    emit_at(frame_, t);
  }

  void hold(const Segment& segment) {
    const FrequencyGroups groups = frequency_groups(frame_.energies, track_.tolerance());
    const DaviesTable table = davies_table<Scalar>(track_.model(), frame_, groups, tables_.baths());
    HoldMap map(frame_.energies, table);
    double t = segment.t0;
    const auto advance_to = [&](double later) {
      if (later <= t) return;
      count_outflow(table, later - t);
      map.apply(later - t, rho_);
      t = later;
    };
    while (wanted_before(segment.t1)) {
      if (stopped()) return;
      advance_to(run_.times[next_]);
      emit_until(t);
    }
    advance_to(segment.t1);
    emit_until(t);
    pass_.counters.exponentials += map.exponentials();
  }

  void ramp(const Segment& segment) {
    for (const Piece& piece : pieces(segment)) {
      if (piece.whole)
        cached_piece(piece);
      else
        local_piece(piece);
      if (failure_) return;
    }
    emit_until(segment.t1);
  }

  void explicit_segment(const Segment& segment) {
    std::vector<double> times;
    for (std::size_t k = next_; k < run_.times.size() && run_.times[k] < segment.t1; ++k) times.push_back(run_.times[k]);
    times.push_back(segment.t1);
    const ExplicitSegment<Scalar> task{tables_, segment, run_.jumps, run_.drive};
    Density state = lab();
    const auto visit = [&](double t, const Density& there) {
      if (t == segment.t1) return;
      enter(track_.at(segment.s0 + (segment.s1 - segment.s0) * (t - segment.t0) / (segment.t1 - segment.t0)), there);
      emit_until(t);
    };
    failure_ = integrate_explicitly<Scalar>(task, times, explicit_tolerance(depth_), options_, state, visit, pass_.counters);
    if (failure_) return;
    enter(track_.at(segment.s1), state);
    emit_until(segment.t1);
  }

  std::vector<Piece> pieces(const Segment& segment) const {
    const auto& nodes = track_.nodes();
    const bool rising = segment.s1 > segment.s0;
    const double low = std::min(segment.s0, segment.s1), high = std::max(segment.s0, segment.s1);
    const auto time = [&](double s) {
      if (s == segment.s0) return segment.t0;
      if (s == segment.s1) return segment.t1;
      return segment.t0 + (segment.t1 - segment.t0) * (s - segment.s0) / (segment.s1 - segment.s0);
    };
    std::vector<Piece> list;
    for (std::size_t i = track_.interval_of(low); i < track_.intervals() && nodes[i].s < high; ++i) {
      const double a = std::max(low, nodes[i].s), b = std::min(high, nodes[i + 1].s);
      if (b <= a) continue;
      const bool whole = a == nodes[i].s && b == nodes[i + 1].s;
      const double s0 = rising ? a : b, s1 = rising ? b : a;
      list.push_back({i, s0, s1, time(s0), time(s1), whole});
    }
    if (!rising) std::reverse(list.begin(), list.end());
    return list;
  }

  /// Depth beyond that of the pass, so that pairs that rotate do not lose their coherence within
  /// one step. `duration` of the complete interval.
  int extra_depth(std::size_t interval, double duration) const {
    const Stretch<Scalar> stretch = track_.stretch(interval, 0);
    const auto tables = tables_.of_steps(interval, 0, *stretch.steps);
    const auto& step = stretch.steps->front();
    const auto& loss = tables->front().loss;
    double most = 0;
    for (Eigen::Index b = 0; b < loss.cols(); ++b)
      for (Eigen::Index a = 0; a < b; ++a)
        if (std::abs(step.first.rotation(a, b)) + std::abs(step.second.rotation(a, b)) > kRotationCounts)
          most = std::max(most, -loss(a, b).real());
    const double ratio = most * duration / kDephasing;
    return ratio <= 1 ? 0 : static_cast<int>(std::ceil(std::log2(ratio)));
  }

  int depth_of(const Piece& piece) const {
    const double ds = track_.nodes()[piece.interval + 1].s - track_.nodes()[piece.interval].s;
    const double duration = (piece.t1 - piece.t0) * ds / std::abs(piece.s1 - piece.s0);
    return std::min(depth_ + extra_depth(piece.interval, duration), Track<Scalar>::kMaxDepth);
  }

  void cached_piece(const Piece& piece) {
    const int depth = depth_of(piece);
    const Stretch<Scalar> stretch = track_.stretch(piece.interval, depth, options_.interrupted);
    if (!stretch.steps) return fail_as_interrupted();
    const auto tables = tables_.of_steps(piece.interval, depth, *stretch.steps, options_.interrupted);
    if (!tables) return fail_as_interrupted();
    const Steps<Scalar>& steps = *stretch.steps;
    const auto& frames = stretch.frames;
    const bool backward = piece.s1 < piece.s0;
    const std::size_t count = steps.size();
    change_basis(*(backward ? frames.back() : frames.front()));
    for (std::size_t k = 0; k < count; ++k) {
      if (stopped()) return;
      const std::size_t at = backward ? count - 1 - k : k;
      const double t0 = k == 0 ? piece.t0 : between(piece, k, count), t1 = k + 1 == count ? piece.t1 : between(piece, k + 1, count);
      samples_within(*frames[backward ? at + 1 : at], piece, t0, t1);
      take(steps[at], (*tables)[at], t1 - t0, backward);
      at_node_ = frames[backward ? at : at + 1];
      emit_at(*at_node_, t1);
    }
    frame_ = *at_node_;
  }

  static double between(const Piece& piece, std::size_t k, std::size_t count) {
    return piece.t0 + (piece.t1 - piece.t0) * static_cast<double>(k) / static_cast<double>(count);
  }

  /// Into the basis a cached frame has; same s, so only manifolds and signs turn.
  void change_basis(const Frame<Scalar>& frame) {
    if (at_node_ == &frame) return;
    const Matrix<Complex> overlap = (frame.vectors.adjoint() * frame_.vectors).template cast<Complex>();
    rho_ = overlap * rho_ * overlap.adjoint();
    frame_ = frame;
  }

  /// A piece that ends inside a base interval: frames of its own, as fine as those of the pass.
  void local_piece(const Piece& piece) {
    const double length = track_.nodes()[piece.interval + 1].s - track_.nodes()[piece.interval].s;
    const double part = std::abs(piece.s1 - piece.s0) / length;
    const int depth = std::max(0, depth_of(piece) - static_cast<int>(std::floor(-std::log2(part))));
    const std::size_t count = std::size_t{1} << depth;
    for (std::size_t k = 0; k < count; ++k) {
      if (stopped()) return;
      const double t0 = k == 0 ? piece.t0 : between(piece, k, count), t1 = k + 1 == count ? piece.t1 : between(piece, k + 1, count);
      const double s1 = k + 1 == count ? piece.s1 : piece.s0 + (piece.s1 - piece.s0) * static_cast<double>(k + 1) / static_cast<double>(count);
      samples_within(frame_, piece, t0, t1);
      Frame<Scalar> end = track_.at(s1);
      local_step(frame_, end, t1 - t0);
      frame_ = std::move(end);
      at_node_ = nullptr;
      emit_at(frame_, t1);
    }
  }

  void local_step(const Frame<Scalar>& start, const Frame<Scalar>& end, double h) {
    const bool backward = end.s < start.s;
    const auto step = backward ? make_step<Scalar>(track_.model(), end, start, track_.tolerance())
                               : make_step<Scalar>(track_.model(), start, end, track_.tolerance());
    pass_.counters.decompositions += 2;
    take(step, davies_table<Scalar>(track_.model(), step.middle, step.groups, tables_.baths()), h, backward);
  }

  void take(const StepFrames<Scalar>& step, const DaviesTable& table, double h, bool backward) {
    if (track_.levels() < track_.model().dimension) {
      count_outflow(table, h);
      count_coherent(step, h);
    }
    unresolved_ += advance<Scalar>(step, table, h, backward, rho_, buffers_);
    ++pass_.counters.steps;
  }

  /// States wanted strictly inside a step: a step of their own that the walk does not keep.
  void samples_within(const Frame<Scalar>& start, const Piece& piece, double t0, double t1) {
    while (wanted_before(t1)) {
      const double t = run_.times[next_];
      if (t <= t0) {
        emit_at(start, t0);
        continue;
      }
      if (stopped()) return;
      const Eigen::MatrixXcd kept = rho_;
      const double unresolved = unresolved_;
      const double s = piece.s0 + (piece.s1 - piece.s0) * (t - piece.t0) / (piece.t1 - piece.t0);
      const Frame<Scalar> there = track_.at(s);
      local_step(start, there, t - t0);
      emit_at(there, t);
      rho_ = kept;
      unresolved_ = unresolved;
    }
  }

  void emit_at(const Frame<Scalar>& frame, double t) {
    if (next_ >= run_.times.size() || run_.times[next_] > t) return;
    const Matrix<Complex> vectors = frame.vectors.template cast<Complex>();
    const Density state = vectors * rho_ * vectors.adjoint();
    const double floor = floor_at(t, state);
    for (; next_ < run_.times.size() && run_.times[next_] <= t; ++next_) {
      pass_.states.push_back(state);
      pass_.floor.push_back(floor);
    }
  }

  /// What finer passes share: the exchange through admixtures that no step resolves, the drift of the trace
  /// where no level is left out, and of coherences the rounding of the phases they have added up.
  double floor_at(double t, const Density& state) const {
    double drift = 0;
    if (track_.levels() == track_.model().dimension) drift = std::abs(state.trace() - run_.initial.trace());
    return kOfExchange * unresolved_ + drift + std::numeric_limits<double>::epsilon() * track_.width() * t * largest_coherence(rho_);
  }

  void count_outflow(const DaviesTable& table, double h) { pass_.leakage += h * table.outflow.dot(rho_.diagonal().real()); }

  /// Admixture of the levels left out that follows the motion: rotation over half the phase of the gap.
  void count_coherent(const StepFrames<Scalar>& step, double h) {
    double sum = 0;
    for (Eigen::Index a = 0; a < rho_.rows(); ++a) {
      const double phase = 0.5 * h * (step.middle.next - step.middle.energies[a]);
      sum += std::max(0.0, rho_(a, a).real()) * step.first.lost[a] / std::max(1.0, phase * phase);
    }
    coherent_leak_ = std::max(coherent_leak_, sum);
  }

  const DaviesTables<Scalar>& tables_;
  const Track<Scalar>& track_;
  const DaviesRun& run_;
  int depth_;
  const DaviesOptions& options_;
  bool explicitly_;
  DaviesPass pass_;
  Frame<Scalar> frame_;                      ///< Basis of rho_.
  const Frame<Scalar>* at_node_ = nullptr;   ///< The cached frame that frame_ copies, if any.
  Eigen::MatrixXcd rho_;
  StepBuffers<Scalar> buffers_;
  std::size_t next_ = 0;
  double coherent_leak_ = 0, unresolved_ = 0;
  std::optional<RunError> failure_;
};

template <class Scalar>
std::optional<RunError> refuse(const DaviesTables<Scalar>& tables, const DaviesRun& run) {
  const auto& nodes = tables.track().nodes();
  const auto outside = [&](double s) { return s < nodes.front().s || s > nodes.back().s; };
  bool leaves = outside(run.timeline.first_s) || outside(run.timeline.last_s);
  for (const Segment& segment : run.timeline.segments) leaves = leaves || outside(segment.s0) || outside(segment.s1);
  if (leaves) return RunError{"s_out_of_range", "the pace leaves the stretch of s whose levels are tracked"};
  const bool needs_all = run.drive || !run.jumps.empty();
  if (needs_all && tables.track().levels() < tables.track().model().dimension)
    return RunError{"too_many_levels", "jumps as written and terms in t need all levels; leave out `levels`"};
  return std::nullopt;
}

}  // namespace

template <class Scalar>
Result<DaviesPass, RunError> davies_pass(const DaviesTables<Scalar>& tables, const DaviesRun& run, int depth, const DaviesOptions& options,
                                         bool explicitly) {
  if (auto error = refuse(tables, run)) return Unexpected{*error};
  const bool must_be = run.drive || !run.jumps.empty();
  return Walk<Scalar>(tables, run, depth, options, explicitly || must_be).walk();
}

template Result<DaviesPass, RunError> davies_pass<double>(const DaviesTables<double>&, const DaviesRun&, int, const DaviesOptions&, bool);
template Result<DaviesPass, RunError> davies_pass<Complex>(const DaviesTables<Complex>&, const DaviesRun&, int, const DaviesOptions&, bool);

}  // namespace tarn::runtime
