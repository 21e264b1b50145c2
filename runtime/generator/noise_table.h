#pragma once
/// \file The dissipative part of a fast-noise equation along s: made once, shared by every anneal
/// time and pace, since it depends on the chip and its baths only.
///
/// Operator form up to where a dense map is cheaper: a coarse-grained bath has tens of jumps, so its
/// maps of Re rho and of Im rho are kept instead (real H and couplings: they do not mix).

#include <Eigen/Core>
#include <cstdint>
#include <functional>
#include <memory>
#include <optional>
#include <span>
#include <vector>

#include "runtime/equation/timeline.h"
#include "runtime/generator/operator_form.h"
#include "runtime/generator/smooth_table.h"

namespace tarn::runtime {

enum class FastEquation : std::uint8_t { redfield, coarse_grained, universal };

struct NoiseTableOptions {
  FastEquation equation = FastEquation::redfield;
  bool shift = true;              ///< With the Lamb shift.
  double s_min = 0, s_max = 1;
  Eigen::Index levels = 0;        ///< Lowest levels that relax; 0 is all.
  double tolerance = 1e-9;        ///< Of the largest element.
  bool keep_operators = false;    ///< Terms also where maps are cheaper: trajectories need the single jumps.
  /// Growing coefficients: the table runs along the time of this run, from 0, instead of s. Kinks of schedules
  /// fall at `breaks` [ns], ascending.
  const Timeline* along = nullptr;
  std::span<const double> breaks = {};
  std::function<bool()> interrupted = {};
};

/// Where the parts stand in the values of one s. N is the dimension.
struct NoiseLayout {
  Eigen::Index dimension = 0;
  std::size_t terms = 0;          ///< left_j.
  bool real_left = false;         ///< left_j are real matrices, N^2 doubles each; else pairs.
  bool own_right = false;         ///< right_j are not left_j.
  bool right_along = false;       ///< They change with s and stand in the table.
  bool split = false;             ///< Two maps instead of terms.

  std::size_t square() const { return static_cast<std::size_t>(dimension * dimension); }
  std::size_t drift() const { return 0; }                                   ///< N x N pairs.
  std::size_t left() const { return 2 * square(); }                         ///< The terms, one after the other.
  std::size_t right() const { return left() + terms * square() * (real_left ? 1 : 2); }
  std::size_t symmetric() const { return left(); }                          ///< Map of Re rho.
  std::size_t pairs() const { return static_cast<std::size_t>(dimension * (dimension + 1) / 2); }
  std::size_t proper_pairs() const { return static_cast<std::size_t>(dimension * (dimension - 1) / 2); }
  std::size_t antisymmetric() const { return left() + pairs() * pairs(); }  ///< Map of Im rho.
  std::size_t size() const;
};

/// Immutable; safe to share between threads.
class NoiseTable {
 public:
  /// One bath for every coupling. Empty if interrupted.
  template <class Scalar>
  static std::shared_ptr<const NoiseTable> make(const LevelModel<Scalar>& model, std::vector<FastBath> baths,
                                                const NoiseTableOptions& options);

  const NoiseLayout& layout() const { return layout_; }
  /// True where the table runs along t: it belongs to one run.
  bool along_time() const { return along_time_; }
  /// layout().size() doubles.
  void at(double s, double t, double* out) const { table_->at(along_time_ ? t : s, out); }
  /// The drift alone: 2 N^2 doubles.
  void drift_at(double s, double t, double* out) const { table_->first(along_time_ ? t : s, 2 * layout_.square(), out); }
  /// right_j where they do not change with s.
  const std::vector<Eigen::MatrixXcd>& fixed_right() const { return fixed_right_; }

  /// What an element of the generator may be off by: differences between table and formulas that were let stand, and
  /// those of the baths' pair functions, for operators of norm 1 [rad/ns].
  double error() const { return table_->error() + bath_error_; }
  bool resolved() const { return table_->resolved(); }
  std::size_t evaluations() const { return table_->evaluations(); }
  std::size_t panels() const { return table_->panels(); }

 private:
  NoiseLayout layout_;
  bool along_time_ = false;
  double bath_error_ = 0;
  std::vector<Eigen::MatrixXcd> fixed_right_;
  std::optional<SmoothTable> table_;
};

}  // namespace tarn::runtime
