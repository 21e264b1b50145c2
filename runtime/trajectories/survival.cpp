#include "runtime/trajectories/survival.h"

#include <algorithm>
#include <cmath>
#include <complex>

#include "runtime/integrate/dense_exponential.h"
#include "runtime/integrate/explicit.h"
#include "runtime/levels/product.h"
#include "runtime/trajectories/shared_work.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

constexpr double kCellPhase = 3;                         ///< [rad]
constexpr double kMostBytes = 128.0 * 1024 * 1024;       ///< Of the maps of one stretch.
constexpr int kDeepest = 12, kDeepestStill = 40;
/// Cells that one thread integrates in a row, so that each step length is guessed from the last.
constexpr std::size_t kCellsInARow = 16;

/// d columns/dt = G columns.
class NoJump {
 public:
  NoJump(const Unravelling& model, Index columns, const SurvivalOptions& options)
      : model_(model), options_(options), columns_(columns),
        integrator_(2 * static_cast<std::size_t>(model.dimension * columns), 1),
        length_((2 * static_cast<std::size_t>(model.dimension * columns) + 15) / 16 * 16), drift_(16) {}

  std::optional<Failure> run(const Piece& piece, double t0, double t1, Eigen::Ref<Eigen::MatrixXcd> state) {
    Eigen::Map<Eigen::MatrixXcd> y(reinterpret_cast<Complex*>(integrator_.state()), model_.dimension, columns_);
    y = state;
    RightHandSide side;
    side.nodes = [&](const Nodes& nodes, bool* bad) {
      for (std::size_t k = 0; k < nodes.count; ++k)
        if (!model_.drift(piece.s_at(nodes.t[k]), nodes.t[k], drift_[k])) bad[0] = true;
    };
    side.stage = [&](std::size_t node, std::size_t count, const double* weights, const double* const* vectors,
                     double* argument, double* derivative) {
      combine(length_, 1, {vectors, count}, weights, argument);
      const Eigen::Map<const Eigen::MatrixXcd> x(reinterpret_cast<const Complex*>(argument), model_.dimension, columns_);
      Eigen::Map<Eigen::MatrixXcd> out(reinterpret_cast<Complex*>(derivative), model_.dimension, columns_);
      if (columns_ == 1) {
        out.col(0).noalias() = drift_[node] * x.col(0);
      } else {
        argument_ = x;
        multiply<Complex>(drift_[node], argument_, derivative_, scratch_);
        out = derivative_;
      }
    };
    const double boundaries[2] = {t0, t1};
    const LaneTask task{boundaries, {}, options_.tolerance, options_.duration};
    const auto failure = integrator_.run(side, {&task, 1}, [](std::size_t, std::size_t, const double*) {}, options_.interrupted).front();
    // The integrator swaps its arrays.
    state = Eigen::Map<const Eigen::MatrixXcd>(reinterpret_cast<const Complex*>(integrator_.state()), model_.dimension, columns_);
    return failure;
  }

  const Counters& counters() const { return integrator_.counters(0); }

 private:
  const Unravelling& model_;
  const SurvivalOptions& options_;
  Index columns_;
  ExplicitIntegrator integrator_;
  std::size_t length_;
  std::vector<Eigen::MatrixXcd> drift_;
  Eigen::MatrixXcd argument_, derivative_;
  Scratch scratch_;
};

}  // namespace

std::optional<Failure> survive(const Unravelling& model, const Piece& piece, double t0, double t1,
                               const SurvivalOptions& options, Eigen::Ref<Eigen::MatrixXcd> columns, Counters& counters) {
  NoJump integration(model, columns.cols(), options);
  const auto failure = integration.run(piece, t0, t1, columns);
  counters += integration.counters();
  return failure;
}

double Survival::begin_of(std::size_t k) const {
  const std::size_t cells = std::size_t{1} << static_cast<unsigned>(depth_);
  return k == cells ? t1_ : t0_ + (t1_ - t0_) * (static_cast<double>(k) / static_cast<double>(cells));
}

bool Survival::serves(const Piece& piece, double t0, double t1) const {
  // Even times differ by rounding; one set of maps serves them.
  return still_ && piece.still && piece.t0 == piece_begin_ && std::abs((t1 - t0) - (t1_ - t0_)) <= 4e-16 * t1;
}

std::optional<Failure> Survival::make(const Unravelling& model, const Piece& piece, double t0, double t1, int depth,
                                      const SurvivalOptions& options, Counters& counters) {
  t0_ = t0;
  t1_ = t1;
  depth_ = depth;
  still_ = piece.still;
  piece_begin_ = piece.t0;
  levels_.assign(static_cast<std::size_t>(depth) + 1, {});
  if (still_) {
    Eigen::MatrixXcd drift;
    if (!model.drift(piece.s_at(t0), t0, drift)) return Failure{FailureKind::not_finite, t0};
    levels_.back() = {dense_exponential(drift, std::ldexp(t1 - t0, -depth))};
    ++counters.exponentials;
  } else if (const auto failure = integrate_cells(model, piece, options, counters)) {
    return failure;
  }
  for (std::size_t level = levels_.size() - 1; level > 0; --level) {
    const auto& finer = levels_[level];
    auto& maps = levels_[level - 1];
    maps.resize(still_ ? 1 : finer.size() / 2);
    for (std::size_t k = 0; k < maps.size(); ++k) maps[k] = still_ ? product<Complex>(finer[0], finer[0]) : product<Complex>(finer[2 * k + 1], finer[2 * k]);
  }
  return std::nullopt;
}

std::optional<Failure> Survival::integrate_cells(const Unravelling& model, const Piece& piece, const SurvivalOptions& options, Counters& counters) {
  std::vector<Eigen::MatrixXcd>& cells = levels_.back();
  cells.resize(std::size_t{1} << static_cast<unsigned>(depth_));
  const std::size_t rows = (cells.size() + kCellsInARow - 1) / kCellsInARow;
  std::vector<std::optional<Failure>> failures(rows);
  std::vector<Counters> counts(rows);
  share_work(rows, options.jobs, [&](std::size_t row) {
    NoJump integration(model, model.dimension, options);
    for (std::size_t k = row * kCellsInARow; k < std::min(cells.size(), (row + 1) * kCellsInARow) && !failures[row]; ++k) {
      cells[k] = Eigen::MatrixXcd::Identity(model.dimension, model.dimension);
      failures[row] = integration.run(piece, begin_of(k), begin_of(k + 1), cells[k]);
    }
    counts[row] = integration.counters();
  });
  for (const Counters& count : counts) counters += count;
  for (const auto& failure : failures)
    if (failure) return failure;
  return std::nullopt;
}

CellPlan plan_cells(const Piece& piece, double duration, double rate, Index dimension) {
  const double cells = std::max(1.0, duration * rate / kCellPhase);
  const int wanted = static_cast<int>(std::ceil(std::log2(cells)));
  if (piece.still) return {std::min(wanted, kDeepestStill), 1};
  const double bytes = 2.0 * 16 * static_cast<double>(dimension * dimension);
  const int most = std::clamp(static_cast<int>(std::floor(std::log2(kMostBytes / bytes))), 0, kDeepest);
  if (wanted <= most) return {wanted, 1};
  return {most, static_cast<std::size_t>(std::ceil(std::ldexp(cells, -most)))};
}

std::optional<double> rate_of(const Unravelling& model, const Piece& piece, double t0, double t1) {
  double rate = 0;
  Eigen::MatrixXcd drift;
  for (const double x : {0.0, 0.25, 0.5, 0.75, 1.0}) {
    const double t = t0 + x * (t1 - t0);
    if (!model.drift(piece.s_at(t), t, drift)) return std::nullopt;
    const Complex mean = drift.trace() / static_cast<double>(drift.rows());
    drift.diagonal().array() -= mean;
    rate = std::max(rate, drift.cwiseAbs().rowwise().sum().maxCoeff());
  }
  return rate;
}

}  // namespace tarn::runtime
