#include "runtime/equation/propagate_open.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <vector>

#include "lang/support/check.h"
#include "runtime/equation/propagate_pieces.h"
#include "runtime/integrate/dense_exponential.h"
#include "runtime/integrate/explicit.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

/// Up to this many elements of rho the whole map is made dense.
constexpr Index kDenseElements = 256;

/// Applications of the generator that cost as much as a dense exponential (measured for 1 to 4 qubits).
double cost_of_dense_map(Index elements) {
  const auto n = static_cast<double>(elements);
  return 100 + 0.03 * n * n * n;
}

class OpenPropagation {
 public:
  OpenPropagation(OpenGenerator& generator, const OpenRun& run, const Density& initial, const Visit& visit,
              const Interrupted& interrupted)
      : generator_(generator), run_(run), visit_(visit), interrupted_(interrupted),
        elements_(initial.size()), length_((2 * static_cast<std::size_t>(initial.size()) + 15) / 16 * 16), integrator_(2 * static_cast<std::size_t>(initial.size()), 1),
        state_(Density(initial.rows(), initial.cols())) {
    std::copy_n(reinterpret_cast<const double*>(initial.data()), 2 * elements_, integrator_.state());
    pieces_ = cut_pieces(*run.timeline, run.breaks, run.reads_t || generator.reads_t());
    for (const double t : run.times) times_.push_back(std::clamp(t, 0.0, run.timeline->duration()));
  }

  Result<Counters, RunError> run() {
    for (const Leg& leg : group_legs(pieces_)) {
      if (leg.count > 0) integrate(leg.first, leg.count);
      if (leg.then_hold && !failure_) hold(leg.first + leg.count);
      if (failure_) return Unexpected{run_error(*failure_)};
    }
    while (next_ < times_.size()) report(integrator_.state());
    counters_ += integrator_.counters(0);
    return counters_;
  }

 private:
  void report(const double* rho) {
    Density& out = std::get<Density>(state_);
    std::copy_n(rho, 2 * elements_, reinterpret_cast<double*>(out.data()));
    visit_(next_++, state_);
  }

  std::span<const double> times_until(double t) const {
    const auto from = times_.begin() + static_cast<std::ptrdiff_t>(next_);
    return {from, std::upper_bound(from, times_.end(), t)};
  }

  /// Makes the generator ready at times of a piece; false where it is not finite.
  bool prepare(const Piece& piece, std::span<const double> t) {
    s_.clear();
    for (const double at : t) s_.push_back(piece.s_at(at));
    const std::vector<bool> good = generator_.prepare(s_, t);
    return std::find(good.begin(), good.end(), false) == good.end();
  }

  void integrate(std::size_t first, std::size_t count) {
    std::vector<double> boundaries = {pieces_[first].t0};
    for (std::size_t i = first; i < first + count; ++i) boundaries.push_back(pieces_[i].t1);
    RightHandSide side;
    side.nodes = [&, this](const Nodes& nodes, bool* bad) {
      const Piece& piece = pieces_[std::min(first + nodes.piece[0], first + count - 1)];
      if (!prepare(piece, nodes.t.first(nodes.count))) bad[0] = true;
    };
    side.stage = [this](std::size_t node, std::size_t vectors, const double* weights, const double* const* from,
                        double* argument, double* derivative) {
      combine(length_, 1, {from, vectors}, weights, argument);
      generator_.apply(node, argument, derivative);
    };
    const LaneTask task{boundaries, times_until(boundaries.back()), run_.tolerance, run_.timeline->duration()};
    const auto on_time = [this](std::size_t, std::size_t, const double* rho) { report(rho); };
    failure_ = integrator_.run(side, {&task, 1}, on_time, interrupted_).front();
  }

  void hold(std::size_t index) {
    const Piece& piece = pieces_[index];
    const double duration = piece.t1 - piece.t0;
    if (elements_ > kDenseElements) return integrate(index, 1);
    if (!prepare(piece, {&piece.t0, 1})) {
      failure_ = Failure{FailureKind::not_finite, piece.t0};
      return;
    }
    const Eigen::MatrixXcd map = generator_.dense(0);
    counters_.evaluations += static_cast<std::uint64_t>(elements_);
    if (8 * map.colwise().norm().maxCoeff() * duration < cost_of_dense_map(elements_)) return integrate(index, 1);
    double from = piece.t0, known = -1;
    Eigen::MatrixXcd factor;
    Eigen::Map<Eigen::VectorXcd> rho(reinterpret_cast<Complex*>(integrator_.state()), elements_);
    const auto go_to = [&](double t) {
      if (t <= from) return;
      // Even times differ by rounding; one exponential serves them.
      if (!(std::abs(t - from - known) <= 4e-16 * t)) {
        factor = dense_exponential(map, known = t - from);
        ++counters_.exponentials;
      }
      rho = (factor * rho).eval();
      from = t;
    };
    for (const double t : times_until(piece.t1)) {
      if (interrupted_ && interrupted_()) {
        failure_ = Failure{FailureKind::interrupted, from};
        return;
      }
      go_to(t);
      report(integrator_.state());
    }
    go_to(piece.t1);
  }

  OpenGenerator& generator_;
  const OpenRun& run_;
  const Visit& visit_;
  const Interrupted& interrupted_;
  Index elements_;
  std::size_t length_;  ///< Doubles of an array of the integrator.
  ExplicitIntegrator integrator_;
  State state_;
  std::vector<Piece> pieces_;
  std::vector<double> times_, s_;
  std::size_t next_ = 0;
  std::optional<Failure> failure_;
  Counters counters_;
};

}  // namespace

Result<Counters, RunError> propagate_open(OpenGenerator& generator, const OpenRun& run, const Density& initial,
                                          const Visit& visit, const Interrupted& interrupted) {
  TARN_CHECK(initial.rows() == generator.dimension() && initial.cols() == generator.dimension());
  TARN_CHECK(std::is_sorted(run.times.begin(), run.times.end()));
  return OpenPropagation(generator, run, initial, visit, interrupted).run();
}

}  // namespace tarn::runtime
