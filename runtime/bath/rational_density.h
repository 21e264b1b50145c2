#pragma once
/// \file Baths whose J is a rational function of w: Drude and Lorentzian peaks.
/// Written by its poles, J(w) = sum_p r_p [1/(w + i nu_p) + 1/(w - i nu_p)], with Re nu_p > 0,
/// everything is a sum of exponentials, digamma functions and exponential integrals.
/// With a = nu_p/nu_1, nu_1 = 2 pi theta:
///   C(t) = sum_p [c_p exp(-nu_p t) + r_p (L(nu_1 t, -a) + L(nu_1 t, a))], c_p = -2 pi i r_p / (1 - exp(i nu_p/theta)),
///   L(x, v) = sum_k>=1 exp(-k x)/(k + v): the poles of 1/(1 - exp(-w/theta)) at -i k nu_1.
/// Source: residues; for Drude J. Chem. Phys. 130, 234111 (2009).

#include <complex>
#include <vector>

#include "runtime/bath/spectral_density.h"

namespace tarn::runtime {

struct DensityPole {
  std::complex<double> rate;     ///< nu_p [rad/ns], Re > 0.
  std::complex<double> residue;  ///< r_p [rad^2/ns^2].
};

/// The poles of J. Where one rate falls on a Matsubara frequency 2 pi k theta, or two rates
/// coincide (critical damping), the formulas hold as limits only: the density is then a
/// cubic interpolation, in its cutoff or width, between four neighbours, and their weighted
/// poles are returned; C and S keep a relative accuracy of 1e-10.
std::vector<DensityPole> poles_of(const Drude& drude, double theta);
std::vector<DensityPole> poles_of(const LorentzianPeak& peak, double theta);

/// C(t), t >= 0, in rad^2/ns^2. theta >= 0. At t = 0 infinite unless the residues sum to zero.
/// Cost grows as |nu_p|/theta for nu_1 t < 0.8.
std::complex<double> rational_correlation(const std::vector<DensityPole>& poles, double theta, double t);

/// Gamma(w) = int_0^inf dt exp(iwt) C(t) = gamma/2 + i S, in rad/ns; S alone in the imaginary
/// part when theta = 0 (the real part is then 0).
std::complex<double> rational_transform(const std::vector<DensityPole>& poles, double theta, double w);

}  // namespace tarn::runtime
