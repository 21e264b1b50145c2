#pragma once
/// \file The functions of one grid point: a kernel together with its inputs.

#include <cstdint>
#include <span>
#include <vector>

#include "lang/support/result.h"
#include "runtime/equation/propagate.h"
#include "runtime/kernel/input_block.h"
#include "runtime/kernel/kernel.h"
#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// Evaluates the sets of a kernel one (s, t) at a time. Values may be NaN or infinite where the
/// user's expression is: who uses a row checks it.
class Functions {
 public:
  /// Inputs: the parameters of the plan at their values, the offsets on, everything else 0.
  Functions(const Kernel& kernel, std::span<const TableNumbers> tables, const Plan& plan);

  const InputBlock& block() const { return block_; }
  double input(std::uint32_t slot) const { return block_.get(slot); }
  void set_input(std::uint32_t slot, double value) { block_.set(slot, value); }

  /// All rows of a set at (s, t).
  std::vector<double> values(std::uint32_t set, double s, double t) const;

  /// All rows of a set at every s, t = 0: out[row * s.size() + point].
  std::vector<double> along(std::uint32_t set, std::span<const double> s) const;

  /// Likewise at pairs (s, t).
  std::vector<double> at(std::uint32_t set, std::span<const double> s, std::span<const double> t) const;

  /// Likewise along s, their derivatives with respect to s. Precondition: the kernel has them.
  std::vector<double> slopes_along(std::uint32_t set, std::span<const double> s) const;

  /// The one row of a spectrum's set at every w [rad/ns].
  std::vector<double> spectrum(std::uint32_t set, std::span<const double> w) const;

 private:
  std::vector<double> call(tarn_values_fn function, std::uint32_t set, std::span<const double> s,
                           std::span<const double> t, std::span<const double> w) const;

  const Kernel& kernel_;
  InputBlock block_;
};

/// The value of a setting, or the error that it is not finite, with its place. `what` is the
/// quantity in the user's terms.
Result<double, RunError> finite_setting(const Setting& setting, std::span<const double> settings, const char* what);

}  // namespace tarn::runtime
