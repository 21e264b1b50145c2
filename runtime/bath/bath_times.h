#pragma once
/// \file The two times of a bath that say whether fast-bath equations may be believed.
///   1/tau_SB = int_0^inf |C(t)| dt,   tau_B = tau_SB int_0^T t |C(t)| dt,
/// T the length of the run: with an exponential cut-off the second integral grows as log T
/// at every temperature. Source: Quantum 4, 227 (2020).
/// tau_SB is for a coupling operator of norm 1: for norm |A| divide it by |A|^2.

#include <complex>
#include <functional>

#include "lang/support/result.h"
#include "runtime/bath/thermal_bath.h"

namespace tarn::runtime {

struct BathTimes {
  double tau_sb;        ///< [ns]; +infinity without coupling.
  double tau_b;         ///< [ns]; 0 without coupling.
  double tau_sb_error;  ///< Estimate [ns].
  double tau_b_error;   ///< Estimate [ns].
};

/// run_length > 0 in ns. Relative accuracy 1e-9 for closed forms and smooth J.
/// Errors: zero_rate_diverges (sub-Ohmic at theta > 0: |C| falls as t^-s), times_diverge
/// (J jumps, as at the edge of a band: |C| falls as 1/t), out_of_range (run_length).
Result<BathTimes, BathError> bath_times(const ThermalBath& bath, double run_length);

/// The same from any C(t), t > 0, with `time_scale` [ns] a time on which it varies. |C| may
/// diverge at t = 0 as a logarithm. Empty when int |C| does not converge.
std::optional<BathTimes> bath_times(const std::function<std::complex<double>(double)>& correlation, double time_scale,
                                    double run_length);

}  // namespace tarn::runtime
