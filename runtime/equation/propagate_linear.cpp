#include "runtime/equation/propagate_linear.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <utility>

#include "lang/support/check.h"
#include "runtime/equation/propagate_pieces.h"
#include "runtime/integrate/chebyshev.h"
#include "runtime/integrate/dense_exponential.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// Up to this many amplitudes a generator is made dense.
constexpr std::size_t kDense = 64;
/// A Chebyshev series pays from this phase [rad] on.
constexpr double kLongPhase = 10;

/// Products of the generator that cost as much as a dense exponential (measured: a decomposition of a
/// Hermitian 64 x 64 matrix 2e3, a matrix exponential 1e5; both about the third power of the size).
double dense_cost(Flow flow, std::size_t amplitudes) {
  const double n = static_cast<double>(amplitudes);
  return 100 + n * n * n * (flow == Flow::skew ? 0.01 : 0.4);
}

struct LaneState {
  std::vector<Piece> pieces;
  std::vector<Leg> legs;
  std::vector<double> times;  ///< Requested, held in the timeline.
  std::size_t next_time = 0;
  std::size_t base = 0;       ///< Piece at which the present leg begins.
  std::size_t last = 0;       ///< Last piece of the present leg.
  std::vector<double> boundaries;
  std::optional<Failure> failure;
  Counters counters;
};

class Propagation {
 public:
  Propagation(const Entries& entries, const tarn_block& block, Flow flow, std::span<const LinearRun> runs,
              std::span<const double> initial, const OnTime& on_time, const Interrupted& interrupted);
  std::vector<LinearOutcome> run();

 private:
  void coefficients(std::size_t nodes);
  RightHandSide side();
  void move(std::size_t leg);
  void integrate(const std::vector<bool>& take);
  std::span<const double> times_until(std::size_t lane, double t) const;
  void hold(std::size_t leg);
  std::vector<Eigen::MatrixXcd> dense_generators();
  void hold_dense(std::size_t lane, const Piece& piece, const Eigen::MatrixXcd& g);
  void hold_long(const Piece& piece);
  bool phase_is_long(const Piece& piece);
  void still_coefficients(std::size_t leg);
  void report_rest();

  const Entries& entries_;
  const tarn_block& block_;
  Flow flow_;
  std::span<const LinearRun> runs_;
  const OnTime& on_time_;
  const Interrupted& interrupted_;
  std::size_t width_, amplitudes_;
  ExplicitIntegrator integrator_;
  std::vector<LaneState> lanes_;
  std::size_t reference_ = 0;  ///< Some lane that has pieces.
  std::vector<double> s_, t_, values_;  ///< At point p = node W + lane.
  AlignedArray coefficients_;  ///< Of every node: row r of lane l at r W + l.
  std::size_t stride_ = 0;     ///< From node to node.
};

Propagation::Propagation(const Entries& entries, const tarn_block& block, Flow flow,
                         std::span<const LinearRun> runs, std::span<const double> initial,
                         const OnTime& on_time, const Interrupted& interrupted)
    : entries_(entries), block_(block), flow_(flow), runs_(runs), on_time_(on_time),
      interrupted_(interrupted), width_(entries.lanes), amplitudes_(std::size_t{1} << entries.bits),
      integrator_(2 * amplitudes_, width_,
                                           flow == Flow::skew ? Phase::comoving : Phase::fixed),
      lanes_(width_) {
  TARN_CHECK(!runs.empty() && runs.size() <= width_);
  TARN_CHECK(initial.size() == 2 * amplitudes_ * width_);
  std::copy(initial.begin(), initial.end(), integrator_.state());
  for (std::size_t l = 0; l < runs.size(); ++l) {
    const Timeline& timeline = *runs[l].timeline;
    LaneState& lane = lanes_[l];
    lane.pieces = cut_pieces(timeline, runs[l].breaks, entries.reads_t);
    lane.legs = group_legs(lane.pieces);
    for (const double t : runs[l].times) lane.times.push_back(std::clamp(t, 0.0, timeline.duration()));
    TARN_CHECK(std::is_sorted(lane.times.begin(), lane.times.end()));
    if (!lane.pieces.empty()) reference_ = l;
  }
  // Whole vectors for each node, each on a boundary of 64 bytes.
  stride_ = (entries.rows * width_ + 7) / 8 * 8;
}

/// coefficients_ of all lanes at the nodes whose s and t stand in s_ and t_.
void Propagation::coefficients(std::size_t nodes) {
  const std::size_t count = nodes * width_;
  values_.resize(entries_.rows * count);
  if (coefficients_.size() < nodes * stride_) coefficients_ = AlignedArray(nodes * stride_);
  const tarn_status status =
      entries_.values(&block_, count, s_.data(), t_.data(), nullptr, values_.data());
  TARN_CHECK(status != TARN_BAD_ARGUMENT);
  for (std::size_t row = 0; row < entries_.rows; ++row)
    for (std::size_t node = 0; node < nodes; ++node)
      std::copy_n(values_.data() + row * count + node * width_, width_,
                  coefficients_.data() + node * stride_ + row * width_);
}

RightHandSide Propagation::side() {
  const auto nodes = [this](const Nodes& at, bool* bad) {
    s_.resize(at.count * width_);
    t_.assign(at.t.begin(), at.t.end());
    for (std::size_t l = 0; l < width_; ++l) {
      // A lane without a timeline reads where another stands; what comes out is not used.
      const std::size_t source = lanes_[l].pieces.empty() ? reference_ : l;
      const LaneState& lane = lanes_[source];
      const Piece& piece = lane.pieces[std::min(lane.base + at.piece[source], lane.last)];
      for (std::size_t node = 0; node < at.count; ++node) {
        if (source != l) t_[node * width_ + l] = piece.t0;
        s_[node * width_ + l] = piece.s_at(t_[node * width_ + l]);
      }
    }
    coefficients(at.count);
    for (std::size_t node = 0; node < at.count; ++node)
      for (std::size_t row = 0; row < entries_.rows; ++row)
        for (std::size_t l = 0; l < width_; ++l)
          bad[l] |= !std::isfinite(coefficients_.data()[node * stride_ + row * width_ + l]);
  };
  const auto stage = [this](std::size_t node, std::size_t count, const double* weights,
                            const double* const* vectors, double* argument, double* derivative) {
    const tarn_status status = entries_.stage(coefficients_.data() + node * stride_, entries_.prepared,
                                              count, weights, vectors, argument, derivative);
    TARN_CHECK(status != TARN_BAD_ARGUMENT);
  };
  return {nodes, stage};
}

std::span<const double> Propagation::times_until(std::size_t l, double t) const {
  const LaneState& lane = lanes_[l];
  const auto from = lane.times.begin() + static_cast<std::ptrdiff_t>(lane.next_time);
  return {from, std::upper_bound(from, lane.times.end(), t)};
}

/// Integrates the present boundaries of the lanes in `take`.
void Propagation::integrate(const std::vector<bool>& take) {
  std::vector<LaneTask> tasks(width_);
  std::vector<std::size_t> offset(width_, 0);
  for (std::size_t l = 0; l < runs_.size(); ++l) {
    LaneState& lane = lanes_[l];
    if (!take[l] || lane.failure) continue;
    tasks[l] = {lane.boundaries, times_until(l, lane.boundaries.back()), runs_[l].tolerance,
                runs_[l].timeline->duration()};
    offset[l] = lane.next_time;
    lane.next_time += tasks[l].times.size();
  }
  const auto report = [&](std::size_t l, std::size_t index, const double* state) {
    on_time_(l, offset[l] + index, state);
  };
  const auto failures = integrator_.run(side(), tasks, report, interrupted_);
  for (std::size_t l = 0; l < runs_.size(); ++l)
    if (failures[l] && take[l]) lanes_[l].failure = failures[l];
}

/// The moving pieces of every lane's leg of that number.
void Propagation::move(std::size_t leg) {
  std::vector<bool> take(width_, false);
  for (std::size_t l = 0; l < runs_.size(); ++l) {
    LaneState& lane = lanes_[l];
    if (leg >= lane.legs.size() || lane.legs[leg].count == 0 || lane.failure) continue;
    const Leg& part = lane.legs[leg];
    take[l] = true;
    lane.base = part.first;
    lane.last = part.first + part.count - 1;
    lane.boundaries = {lane.pieces[lane.base].t0};
    for (std::size_t i = lane.base; i <= lane.last; ++i) lane.boundaries.push_back(lane.pieces[i].t1);
  }
  if (std::find(take.begin(), take.end(), true) != take.end()) integrate(take);
}

/// Coefficients of every lane's still piece of that leg, as node 0.
void Propagation::still_coefficients(std::size_t leg) {
  s_.assign(width_, 0);
  t_.assign(width_, 0);
  for (std::size_t l = 0; l < width_; ++l) {
    const LaneState& lane = lanes_[lanes_[l].pieces.empty() ? reference_ : l];
    const bool holds = leg < lane.legs.size() && lane.legs[leg].then_hold;
    const Piece& piece = lane.pieces[holds ? lane.legs[leg].first + lane.legs[leg].count : 0];
    s_[l] = piece.segment.s0;
    t_[l] = piece.t0;
  }
  coefficients(1);
}

/// G of all lanes as matrices, column by column.
std::vector<Eigen::MatrixXcd> Propagation::dense_generators() {
  const auto n = static_cast<Eigen::Index>(amplitudes_);
  std::vector<Eigen::MatrixXcd> result(width_, Eigen::MatrixXcd(n, n));
  AlignedArray x(2 * amplitudes_ * width_), y(2 * amplitudes_ * width_);
  for (Eigen::Index column = 0; column < n; ++column) {
    double* unit = x.data() + 2 * static_cast<std::size_t>(column) * width_;
    std::fill_n(unit, width_, 1.0);
    entries_.apply(coefficients_.data(), entries_.prepared, x.data(), y.data());
    std::fill_n(unit, width_, 0.0);
    for (std::size_t i = 0; i < amplitudes_; ++i)
      for (std::size_t l = 0; l < width_; ++l)
        result[l](static_cast<Eigen::Index>(i), column) =
            Complex(y.data()[2 * i * width_ + l], y.data()[(2 * i + 1) * width_ + l]);
  }
  return result;
}

/// The still piece at the end of every lane's leg of that number.
void Propagation::hold(std::size_t leg) {
  std::vector<bool> holds(width_, false), rest(width_, false);
  for (std::size_t l = 0; l < runs_.size(); ++l)
    holds[l] = !lanes_[l].failure && leg < lanes_[l].legs.size() && lanes_[l].legs[leg].then_hold;
  if (std::find(holds.begin(), holds.end(), true) == holds.end()) return;
  still_coefficients(leg);
  std::vector<Eigen::MatrixXcd> generators;
  if (amplitudes_ <= kDense) generators = dense_generators();
  for (std::size_t l = 0; l < runs_.size(); ++l) {
    if (!holds[l]) continue;
    LaneState& lane = lanes_[l];
    lane.base = lane.last = lane.legs[leg].first + lane.legs[leg].count;
    const Piece& piece = lane.pieces[lane.base];
    lane.boundaries = {piece.t0, piece.t1};
    if (generators.empty()) {
      rest[l] = width_ > 1 || !phase_is_long(piece);
      if (!rest[l]) hold_long(piece);
      continue;
    }
    lane.counters.evaluations += amplitudes_;
    if (!generators[l].allFinite()) {
      lane.failure = Failure{FailureKind::not_finite, piece.t0};
      continue;
    }
    const double products = 8 * generators[l].colwise().norm().maxCoeff() * (piece.t1 - piece.t0);
    rest[l] = products < dense_cost(flow_, amplitudes_);
    if (!rest[l]) hold_dense(l, piece, generators[l]);
  }
  if (std::find(rest.begin(), rest.end(), true) != rest.end()) integrate(rest);
}

void Propagation::hold_dense(std::size_t l, const Piece& piece, const Eigen::MatrixXcd& g) {
  LaneState& lane = lanes_[l];
  const auto part = [&](std::size_t i) { return integrator_.state() + 2 * i * width_ + l; };
  const auto store = [&](const Eigen::VectorXcd& x) {
    for (std::size_t i = 0; i < amplitudes_; ++i) {
      part(i)[0] = x[static_cast<Eigen::Index>(i)].real();
      part(i)[width_] = x[static_cast<Eigen::Index>(i)].imag();
    }
  };
  Eigen::VectorXcd start(static_cast<Eigen::Index>(amplitudes_));
  for (std::size_t i = 0; i < amplitudes_; ++i)
    start[static_cast<Eigen::Index>(i)] = Complex(part(i)[0], part(i)[width_]);
  SkewSpectrum spectrum;
  if (flow_ == Flow::skew) {
    spectrum = skew_spectrum(g);
    ++lane.counters.decompositions;
  }
  double from = piece.t0, known = -1;
  Eigen::MatrixXcd factor;
  const auto go_to = [&](double t) {
    if (t > from && flow_ == Flow::skew) store(evolve(spectrum, t - piece.t0, start));
    if (t > from && flow_ == Flow::damped) {
      // Even times differ by rounding; one exponential serves them.
      if (!(std::abs(t - from - known) <= 4e-16 * t)) {
        factor = dense_exponential(g, known = t - from);
        ++lane.counters.exponentials;
      }
      store(start = factor * start);
    }
    from = std::max(from, t);
  };
  for (const double t : times_until(l, piece.t1)) {
    if (interrupted_ && interrupted_()) {
      lane.failure = Failure{FailureKind::interrupted, from};
      return;
    }
    go_to(t);
    on_time_(l, lane.next_time++, integrator_.state());
  }
  go_to(piece.t1);
}

bool Propagation::phase_is_long(const Piece& piece) {
  AlignedArray y(2 * amplitudes_);
  entries_.apply(coefficients_.data(), entries_.prepared, integrator_.state(), y.data());
  ++lanes_[0].counters.evaluations;
  double state = 0, slope = 0;
  squares(y.size(), 1, integrator_.state(), &state);
  squares(y.size(), 1, y.data(), &slope);
  return std::sqrt(slope / state) * (piece.t1 - piece.t0) > kLongPhase;
}

/// A long stay of one large system.
void Propagation::hold_long(const Piece& piece) {
  LaneState& lane = lanes_[0];
  const Product product = [this](const double* x, double* y) {
    entries_.apply(coefficients_.data(), entries_.prepared, x, y);
  };
  Interval interval = estimate_spectrum(product, 2 * amplitudes_, 16, lane.counters);
  ChebyshevExponential exponential(2 * amplitudes_);
  double from = piece.t0;
  const auto go_to = [&](double t) {
    if (lane.failure || t <= from) return;
    const double share = (t - from) / runs_[0].timeline->duration();
    lane.failure = exponential.advance(product, t - from, 0.1 * runs_[0].tolerance * share, interval,
                                       integrator_.state(), lane.counters, interrupted_);
    if (lane.failure) lane.failure->t += from;
    from = t;
  };
  for (const double t : times_until(0, piece.t1)) {
    go_to(t);
    if (lane.failure) return;
    on_time_(0, lane.next_time++, integrator_.state());
  }
  go_to(piece.t1);
}

/// Times after the last piece: all of them where nothing lasts.
void Propagation::report_rest() {
  for (std::size_t l = 0; l < runs_.size(); ++l)
    while (!lanes_[l].failure && lanes_[l].next_time < lanes_[l].times.size())
      on_time_(l, lanes_[l].next_time++, integrator_.state());
}

std::vector<LinearOutcome> Propagation::run() {
  std::size_t legs = 0;
  for (const LaneState& lane : lanes_) legs = std::max(legs, lane.legs.size());
  for (std::size_t leg = 0; leg < legs; ++leg) {
    move(leg);
    hold(leg);
  }
  report_rest();
  std::vector<LinearOutcome> outcomes;
  for (std::size_t l = 0; l < runs_.size(); ++l) {
    outcomes.push_back({lanes_[l].failure, lanes_[l].counters});
    outcomes.back().counters += integrator_.counters(l);
  }
  return outcomes;
}

}  // namespace

std::vector<LinearOutcome> propagate_linear(const Entries& entries, const tarn_block& block, Flow flow,
                                            std::span<const LinearRun> runs,
                                            std::span<const double> initial, const OnTime& on_time,
                                            const Interrupted& interrupted) {
  return Propagation(entries, block, flow, runs, initial, on_time, interrupted).run();
}

}  // namespace tarn::runtime
