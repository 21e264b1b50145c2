#pragma once
/// \file Evolution without a jump: d psi/dt = G(s(t), t) psi, one state at a time or all at once.
///
/// Over a stretch of time all trajectories share the maps of 2^depth equal cells and, level by level, their
/// products: a state goes over the longest stretch that it survives, in one product.

#include <Eigen/Core>
#include <cstdint>
#include <optional>
#include <vector>

#include "runtime/equation/propagate_pieces.h"
#include "runtime/integrate/counters.h"
#include "runtime/integrate/failure.h"
#include "runtime/trajectories/unravelling.h"

namespace tarn::runtime {

/// How exactly, and who may stop it.
struct SurvivalOptions {
  double tolerance = 1e-8;  ///< The error over `duration`, in the 2-norm, is a few times this at most.
  double duration = 0;      ///< [ns]
  std::size_t jobs = 1;
  Interrupted interrupted = {};
};

/// columns <- their evolution without a jump from t0 to t1, both on the piece, by the explicit pair 8(5,3).
std::optional<Failure> survive(const Unravelling& model, const Piece& piece, double t0, double t1,
                               const SurvivalOptions& options, Eigen::Ref<Eigen::MatrixXcd> columns, Counters& counters);

/// The maps of a stretch. Immutable once made; safe to share between threads.
class Survival {
 public:
  /// From t0 to t1 on the piece, in cells of a few rad. A still piece takes exponentials instead of steps.
  std::optional<Failure> make(const Unravelling& model, const Piece& piece, double t0, double t1, int depth,
                              const SurvivalOptions& options, Counters& counters);

  int depth() const { return depth_; }
  /// Over cells k 2^(depth - level) .. (k + 1) 2^(depth - level) - 1.
  const Eigen::MatrixXcd& over(int level, std::size_t k) const {
    const auto& maps = levels_[static_cast<std::size_t>(level)];
    return maps[maps.size() == 1 ? 0 : k];
  }
  /// Where cell k begins [ns].
  double begin_of(std::size_t k) const;
  /// The same stretch of a still piece, but for where it begins.
  bool serves(const Piece& piece, double t0, double t1) const;
  void move_to(double t0) { t1_ = t0 + (t1_ - t0_); t0_ = t0; }

 private:
  std::optional<Failure> integrate_cells(const Unravelling& model, const Piece& piece, const SurvivalOptions& options, Counters& counters);

  double t0_ = 0, t1_ = 0;
  int depth_ = 0;
  bool still_ = false;
  double piece_begin_ = 0;
  std::vector<std::vector<Eigen::MatrixXcd>> levels_;  ///< Whole stretch first; still pieces have one map a level.
};

/// The depth that makes cells about 3 rad long, and no more maps than `most` bytes hold: 2^depth cells of
/// `reach` ns at most fit into t1 - t0, so long stretches of a piece that moves are better made in parts.
struct CellPlan {
  int depth = 0;
  std::size_t parts = 1;
};
CellPlan plan_cells(const Piece& piece, double duration, double rate, Eigen::Index dimension);

/// A bound of |G| without its mean, the largest found at a few instants of the piece [1/ns]; empty where G is not finite.
std::optional<double> rate_of(const Unravelling& model, const Piece& piece, double t0, double t1);

}  // namespace tarn::runtime
