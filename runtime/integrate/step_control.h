#pragma once
/// \file How long the next step may be, from the error of this one.

#include <algorithm>
#include <cmath>

namespace tarn::runtime {

/// The error estimate of the pair 8(5,3) from the norms of its two embedded estimates; of order 8.
/// `share` of e3 is 0.1 in the literature. It takes both norms to come from one frequency; where slow
/// large parts make e3 and fast small ones e5, a smaller share is right.
inline double blended_error(double e5, double e3, double share) {
  if (e5 == 0) return 0;
  return e5 * e5 / std::sqrt(e5 * e5 + share * share * e3 * e3);
}

/// Factor for the step after an accepted one: proportional and integral control, for an error of
/// order 8 in the step. Logarithms of error over tolerance, of this step and of the one before.
/// Source: Solving Ordinary Differential Equations II (Springer, 1996), IV.2.
inline double growth_after_success(double log_ratio, double last_log_ratio) {
  constexpr double kIntegral = 0.04, kProportional = 1.0 / 8 - 0.2 * kIntegral;
  return std::clamp(0.9 * std::exp(kIntegral * last_log_ratio - kProportional * log_ratio), 0.3, 6.0);
}

/// Factor for repeating a rejected step; NaN and infinity shrink it most.
inline double shrink_after_failure(double ratio) {
  if (!std::isfinite(ratio)) return 0.1;
  return std::clamp(0.9 * std::pow(ratio, -1.0 / 8), 0.1, 0.9);
}

}  // namespace tarn::runtime
