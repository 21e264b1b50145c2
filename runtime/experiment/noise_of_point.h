#pragma once
/// \file What the baths of one grid point are to its equation.

#include <memory>
#include <span>
#include <vector>

#include "runtime/bath/bath_times.h"
#include "runtime/experiment/chip_family.h"
#include "runtime/generator/operator_form.h"

namespace tarn::runtime {

/// One for every bath of the plan.
using ThermalBaths = std::vector<std::shared_ptr<const ThermalBath>>;

/// The baths of the plan at one point, checked: good for fast-noise equations (no infinite rate at zero
/// frequency). Errors: `bad_bath`.
Result<ThermalBaths, RunError> fast_baths(const Plan& plan, std::span<const double> settings,
                                          std::shared_ptr<const Functions> functions);

/// tau_SB of a unit operator and tau_B with the run's length; without a pace 10 tau_SB. Errors: `bad_bath`.
Result<BathTimes, RunError> bath_times_of_run(const Plan& plan, std::uint32_t bath, const ThermalBath& made, double duration);

/// The largest E_max - E_min along s, with some to spare for what lies between the places looked at: Bohr frequencies
/// stay below it [rad/ns].
double frequency_bound(const PlanModel& model, const Functions& functions, const RangeOfS& range);

/// The averaging time of every noise operator [ns]; none where the equation does not average. Automatic:
/// sqrt(tau_SB tau_B), rounded to a quarter of an octave. Source: the geometric mean is common practice; times:
/// Quantum 4, 227 (2020). Errors: `bad_bath`,
/// `not_finite`, `window_out_of_range`.
Result<std::vector<double>, RunError> windows_of(const Plan& plan, const NoiseOperators& noise, const ThermalBaths& baths,
                                                 const Functions& functions, const RangeOfS& range, const PointTask& task);

/// A FastBath for every noise operator, good for frequencies up to `width` [rad/ns] and times up to `duration`
/// [ns]. `windows`: of each operator, for `coarse_grained`.
std::vector<FastBath> fast_noise_of(const EquationChoice& choice, const NoiseOperators& noise,
                                    const ThermalBaths& baths, double width,
                                    double duration, std::span<const double> windows);

}  // namespace tarn::runtime
