#pragma once
/// \file Levels of a chip's Hamiltonian, without its terms in t, at one s of one grid point.

#include <memory>
#include <optional>
#include <utility>

#include "runtime/experiment/functions.h"
#include "runtime/experiment/lowest_levels.h"
#include "runtime/integrate/vectors.h"

namespace tarn::runtime {

/// Levels closer than this part of the spectral width are one.
inline constexpr double kSameLevel = 1e-9;

/// Coefficients of the chip's operators at (s, t), checked. Error: `not_finite`.
Result<std::vector<double>, RunError> coefficients_at(const Plan& plan, const Functions& functions, double s, double t);

/// Finds levels by dense diagonalisation or, where few of many are wanted, by a Krylov space on the
/// kernel's product. One grid point and one thread; not safe to share.
class ChipLevels {
 public:
  ChipLevels(const Plan& plan, const Kernel& kernel, const Functions& functions, Interrupted interrupted);

  /// The `count` lowest levels (all if there are fewer), every level that coincides with the last
  /// of them, and one above unless there is none. Levels of an earlier s speed up the next.
  /// Errors: `not_finite`, `levels_not_found`, `interrupted`, and `too_many_levels` where more than
  /// 4096 would have to be kept. What is pointed to is valid until the next call.
  Result<const Levels*, RunError> lowest(double s, Eigen::Index count);

  /// Every level up to `above` over the lowest, and one above that. Errors as lowest().
  Result<const Levels*, RunError> within(double s, double above);

  std::uint64_t decompositions() const { return decompositions_; }

 private:
  /// Fills `levels_` with at least `count` levels at s, or finds them there.
  Result<Done, RunError> solve(double s, Eigen::Index count);
  Result<Levels, RunError> solve_fresh(double s, Eigen::Index count);
  HermitianProduct product(const std::vector<double>& coefficients);

  const Plan& plan_;
  const Kernel& kernel_;
  const Functions& functions_;
  Interrupted interrupted_;
  Eigen::Index dimension_;
  bool real_;  ///< H is a real matrix.
  AlignedArray prepared_;
  std::optional<double> solved_;  ///< The s that `levels_` belong to.
  Levels levels_;
  std::uint64_t decompositions_ = 0;
};

/// First and one past last of the levels that coincide with level k (neighbour by neighbour).
std::pair<Eigen::Index, Eigen::Index> coinciding(const Levels& levels, Eigen::Index k);

}  // namespace tarn::runtime
