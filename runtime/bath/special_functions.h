#pragma once
/// \file Special functions of complex argument that bath correlation functions need.
/// All are evaluated by upward shift of the argument and an asymptotic series; the
/// real exponential integral comes from Boost.Math.
///
/// Accuracy of every function: |error| <= 1e-13 max(1, |value|) for the arguments named.
/// Sources: NIST Digital Library of Mathematical Functions, chapters 5, 6 and 25.

#include <complex>

namespace tarn::runtime {

/// Natural logarithm of the gamma function, the branch that is real for z > 0 and
/// continuous off the negative real axis. |arg z| <= 3 pi/4. DLMF 5.11.1.
std::complex<double> log_gamma(std::complex<double> z);

/// psi(z) = d log_gamma / dz, any z but 0, -1, -2, ... DLMF 5.11.2, reflection 5.5.4.
std::complex<double> digamma(std::complex<double> z);

/// psi'(z) = sum over k >= 0 of (z + k)^-2. |arg z| <= 3 pi/4. DLMF 5.15.
std::complex<double> trigamma(std::complex<double> z);

/// Hurwitz zeta: sum over k >= 0 of (z + k)^-s with principal powers.
/// Real s > 1, |arg z| <= 3 pi/4, z != 0. DLMF 25.11.1 and 25.11.5.
std::complex<double> hurwitz_zeta(double s, std::complex<double> z);

/// exp(-x) Ei(x), real x != 0; does not overflow. Ei is a principal value for x > 0.
/// DLMF 6.2.5.
double exp_integral_ei_scaled(double x);

/// exp(z) E1(z), principal branch (cut along z < 0, where the value is the one from
/// above, Im z = +0); z != 0. DLMF 6.6.2 (series), 6.9.1 (continued fraction), 6.12.1.
std::complex<double> exp_integral_e1_scaled(std::complex<double> z);

/// Sum over k >= 1 of exp(-k x) / (k + v), x > 0, v not a negative integer: a Lerch
/// sum (DLMF 25.14), by Euler-Maclaurin summation (DLMF 2.10.1). Cost grows with
/// max(0, -Re v). At x = 0 it returns the finite part, -psi(1 + v): what is left after
/// -log(1 - exp(-x)) and -gamma_E are taken off.
std::complex<double> lerch_sum(double x, std::complex<double> v);

}  // namespace tarn::runtime
