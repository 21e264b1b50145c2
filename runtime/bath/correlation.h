#pragma once
/// \file The correlation function C(t) = <B(t)B(0)> of a bath, in rad^2/ns^2; C(-t) = C(t)*.
/// Power law: gamma and Hurwitz zeta functions; Drude, peaks: exponentials and Lerch sums;
/// tables, functions: Fourier transforms of Legendre panels of J. Formulas and sources stand
/// in power_law_bath.h, rational_density.h, panel_series.h.

#include <Eigen/Core>
#include <complex>
#include <functional>
#include <vector>

#include "runtime/bath/thermal_bath.h"

namespace tarn::runtime {

class CorrelationFunction {
 public:
  explicit CorrelationFunction(const ThermalBath& bath);

  /// C(t), any real t [ns]. Closed forms: relative accuracy 1e-12 for t up to 1e6 ns (1e-9
  /// next to the coincidences named in rational_density.h); tables and functions: 1e-12 of
  /// int J coth, uniform in t. A Drude part makes the real part
  /// +infinity at t = 0.
  std::complex<double> at(double t) const;

  /// Shape: (n) in, (n) out.
  Eigen::ArrayXcd operator()(const Eigen::Ref<const Eigen::ArrayXd>& t) const;

 private:
  std::vector<std::function<std::complex<double>(double)>> terms_;  ///< For t >= 0.
};

}  // namespace tarn::runtime
