#pragma once
/// \file Thermal rates of a bath: a spectral density at a temperature.
/// Angular rates are in rad/ns; a temperature is given as theta = k_B T / hbar.
/// Shifts stand in shift.h, correlation functions in correlation.h.

#include <Eigen/Core>
#include <memory>
#include <vector>

#include "lang/support/result.h"
#include "runtime/bath/density_panels.h"
#include "runtime/bath/spectral_density.h"

namespace tarn::runtime {

/// A checked density and temperature. Immutable; safe to share between threads (if the
/// functions of its Sampled components are).
class ThermalBath {
 public:
  /// theta >= 0 in rad/ns; 0 is the limit of zero temperature. Errors: the first fault of
  /// the density, then theta NaN, infinite or negative (component is then 0).
  static Result<ThermalBath, BathError> make(SpectralDensity density, double theta);

  const SpectralDensity& components() const { return density_; }
  double theta() const { return theta_; }

  /// J at `w` [rad/ns], in rad/ns. Odd. Shape: (n) in, (n) out.
  Eigen::ArrayXd density(const Eigen::Ref<const Eigen::ArrayXd>& w) const;

  /// gamma(w) = 2 pi J(w) / (1 - exp(-w/theta)), in 1/ns. Shape: (n) in, (n) out.
  ///
  /// Never negative; continuous at w = 0; gamma(-w) is computed as exp(-w/theta) gamma(w), so
  /// detailed balance holds to rounding. Positive w: the system loses energy. At w = 0
  /// 2 pi theta J'(0), +infinity where J/w has no limit: ask zero_rate() first.
  /// Relative accuracy 1e-14 plus that of a Sampled function.
  /// Source: Phys. Rev. 83, 34 (1951).
  Eigen::ArrayXd rate(const Eigen::Ref<const Eigen::ArrayXd>& w) const;

  /// gamma(0) in 1/ns. Error: zero_rate_diverges, naming the component (sub-Ohmic, theta > 0).
  Result<double, BathError> zero_rate() const;

  /// lambda = int_0^inf J/w dw in rad/ns: closed form, or panels to 1e-12.
  double reorganisation() const;

  /// Panels of component `row`, or null where closed forms serve.
  const DensityPanels* panels(std::size_t row) const { return panels_[row].get(); }

 private:
  ThermalBath(SpectralDensity density, double theta);

  SpectralDensity density_;
  double theta_;
  std::vector<std::shared_ptr<const DensityPanels>> panels_;
};

}  // namespace tarn::runtime
