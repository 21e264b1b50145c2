#pragma once
/// \file The correlation function of a bath as a sum of decaying exponentials, as the hierarchy and
/// the driven second-order equation need it: C(t) = sum_k c_k exp(-nu_k t), t > 0.
/// Two ways lead there:
/// - Pade sums, where J is rational: J keeps its poles, and 1/(1 - exp(-x)) becomes
///   1/x + 1/2 + sum_j 2 eta_j x/(x^2 + xi_j^2), so that C has rates nu_p and theta xi_j. gamma(0) is exact.
///   Source: J. Chem. Phys. 133, 101106 (2010) and 134, 244106 (2011).
/// - Fits, for any J: J coth(w/2 theta) and J/w, both even in w, are fitted by rational functions of w^2 with
///   common poles -nu_k^2; the coefficients then by least squares to C(t). On the Fourier side one grid
///   serves all time scales. Source: SIAM J. Sci. Comput. 40, A1494 (2018).

#include <complex>
#include <limits>
#include <vector>

#include "lang/support/result.h"
#include "runtime/bath/thermal_bath.h"

namespace tarn::runtime {

/// One term of C(t) = sum coefficient exp(-rate t), C(t)* = sum conjugate exp(-rate t), t > 0.
struct Exponential {
  std::complex<double> coefficient;  ///< [rad^2/ns^2]
  std::complex<double> conjugate;    ///< Of the same exponential in C(t)* [rad^2/ns^2].
  std::complex<double> rate;         ///< [1/ns], real part > 0.
};

struct ExponentialSum {
  std::vector<Exponential> terms;  ///< Slowest first. Closed under conjugation of the rates.
  /// What is left of gamma(0)/2 = int_0^inf Re C dt [1/ns]: a white rest, for the hierarchy's
  /// terminator. Either sign.
  double rest = 0;
  /// With w_max: the largest |Gamma - Gamma of the sum and its rest| over 1/T <= |w| <= w_max, T the run
  /// length, over the largest |Gamma|: what a system with frequencies up to w_max notices.
  /// Without: int_0^T |C - sum| dt over int_0^T |C| dt, good to a few per cent, the rest not counted in. A
  /// far harder measure where C diverges at t = 0, as for Drude.
  double error = 0;
};

/// Pade [N-1/N] sum with N = `count` >= 1 terms beside the poles of J, for baths whose components are all
/// rational (Drude, Lorentzian peaks) and theta > 0. Where a pole of J falls on a Matsubara
/// frequency it is replaced as poles_of() says: the sum is longer and its terms cancel, so
/// a fit serves better there.
/// Errors: out_of_range (count, run_length, w_max, theta = 0, a component that is not rational).
Result<ExponentialSum, BathError> pade_sum(const ThermalBath& bath, int count, double run_length,
                                           double w_max = std::numeric_limits<double>::infinity());

/// Fit on (0, run_length] with at most `most` >= 1 terms: the best of all lengths up to it. Costs up to
/// a second for 40 terms.
/// Errors: those of bath_times(), and out_of_range (most, w_max).
Result<ExponentialSum, BathError> fitted_sum(const ThermalBath& bath, int most, double run_length,
                                             double w_max = std::numeric_limits<double>::infinity());

/// The shortest of both kinds whose error is below `tolerance`, or the best one if none is (up to 40
/// terms). A bath that is no bath gives no terms.
/// Errors: those of bath_times(), and out_of_range (tolerance, w_max).
Result<ExponentialSum, BathError> exponential_sum(const ThermalBath& bath, double tolerance, double run_length,
                                                  double w_max = std::numeric_limits<double>::infinity());

/// sum_k c_k exp(-nu_k t), t >= 0, in rad^2/ns^2; without the rest.
std::complex<double> correlation(const ExponentialSum& sum, double t);

/// Gamma(w) = sum_k c_k/(nu_k - i w), and the rest, in rad/ns: gamma/2 + i S of the sum.
std::complex<double> half_range(const ExponentialSum& sum, double w);

}  // namespace tarn::runtime
