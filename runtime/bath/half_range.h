#pragma once
/// \file Half-range transforms of the correlation function of a bath, the coefficients of Redfield's equation.
///   Gamma(w)   = int_0^inf ds exp(iws) C(s) = gamma(w)/2 + i S(w),
///   Gamma_t(w) = int_0^t   ds exp(iws) C(s), the memory that a state begun at t = 0 has.
/// Source: IBM J. Res. Dev. 1, 19 (1957).
/// With an exponential cut-off |C| falls as 2 eta theta/(cutoff s^2), so Gamma_t reaches Gamma(0) as
/// 2 eta theta/(cutoff t) only, at other w as that over |w| t^2.

#include <Eigen/Core>
#include <complex>

#include "runtime/bath/panel_series.h"
#include "runtime/bath/shift.h"
#include "runtime/bath/thermal_bath.h"

namespace tarn::runtime {

/// Gamma(w). gamma(0) must be finite: ask ThermalBath::zero_rate() first.
class HalfRange {
 public:
  /// A table of S on [-w_max, w_max], w_max > 0; `tolerance` and costs as for ShiftTable. Outside, S is computed afresh.
  HalfRange(const ThermalBath& bath, double w_max, double tolerance = 1e-10);

  /// Shape: (n) in, (n) out, in rad/ns.
  Eigen::ArrayXcd operator()(const Eigen::Ref<const Eigen::ArrayXd>& w) const;

  /// Of S on the table [rad/ns].
  double error() const { return shift_.error(); }

 private:
  ThermalBath bath_;
  ShiftTable shift_;
};

/// Gamma_t(w) for 0 <= t <= t_max by Legendre panels of C, graded to t = 0, whose Fourier transforms are exact.
class GrowingHalfRange {
 public:
  /// t_max > 0 [ns]. Costs some thousand values of C, more where C rings through many periods.
  GrowingHalfRange(const ThermalBath& bath, double t_max);

  /// Any real w. Shape: (n) in, (n) out, in rad/ns. Some 10 us a value, and as many for each t.
  Eigen::ArrayXcd operator()(double t, const Eigen::Ref<const Eigen::ArrayXd>& w) const;

  /// The same integral with s C(s) in place of C, times t^-1: what the mean over a window needs.
  Eigen::ArrayXcd first_moment(double t, const Eigen::Ref<const Eigen::ArrayXd>& w) const;

  /// Estimate of int_0^t_max |C - panels| ds, which bounds the error of every value [rad/ns].
  double error() const;

 private:
  /// One function's two parts.
  struct Pair {
    PanelSeries real, imaginary;
  };
  static Eigen::ArrayXcd transform(const Pair& pair, double t, const Eigen::Ref<const Eigen::ArrayXd>& w);

  Pair correlation_;
  Pair moment_;  ///< s C(s)/t_max.
  double t_max_;
};

}  // namespace tarn::runtime
