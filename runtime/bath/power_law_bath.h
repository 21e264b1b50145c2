#pragma once
/// \file Power-law baths with exponential cut-off: correlation function and half-range transform.
/// With z = 1/cutoff + i t, y = 1/cutoff - i t:
///   C(t) = eta cutoff^(1-s) Gamma(s+1) {z^-(s+1) + theta^(s+1) [zeta(s+1, 1 + theta z) + zeta(s+1, 1 + theta y)]},
/// zeta the Hurwitz zeta function. As a function of complex t it has its poles and cuts on the
/// imaginary axis only, so Gamma(w) = int_0^inf dt exp(iwt) C(t) may be taken along
/// arg t = +-pi/4, where the integrand decays without long oscillation.
/// Source: Rev. Mod. Phys. 59, 1 (1987); trapezoidal rule in log t: SIAM Review 56, 385 (2014).

#include <complex>
#include <vector>

#include "runtime/bath/spectral_density.h"

namespace tarn::runtime {

/// C at complex t with |arg t| <= pi/4, in rad^2/ns^2. theta >= 0. Relative accuracy 1e-13.
std::complex<double> power_law_correlation(const PowerLaw& law, double theta, std::complex<double> t);

/// Gamma(w) at any number of w for one bath; construction costs 1400 to 3000 evaluations of C, some ms.
class PowerLawTransform {
 public:
  PowerLawTransform(const PowerLaw& law, double theta);

  /// Gamma(w) = gamma/2 + i S in rad/ns, any real w != 0. |error| below 1e-12 (lambda + gamma);
  /// the real part repeats gamma/2 and so checks itself. About 10 us.
  std::complex<double> operator()(double w) const;

 private:
  std::vector<std::complex<double>> time_;       ///< Nodes on arg t = pi/4 [ns].
  std::vector<std::complex<double>> emission_;   ///< Weights of C there, for w > 0.
  std::vector<std::complex<double>> absorption_; ///< Weights at the conjugate nodes, for w < 0.
};

/// S(w) of an Ohmic bath at theta = 0: eta [-cutoff + w exp(-w/cutoff) Ei(w/cutoff)], rad/ns.
double cold_ohmic_shift(double eta, double cutoff, double w);

}  // namespace tarn::runtime
