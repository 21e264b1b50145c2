#pragma once
/// \file What a bath's spectral density J(w) is made of: value types, their checks, J itself.
/// Angular frequencies in rad/ns, J in rad/ns (hbar = 1). J(-w) = -J(w) throughout.
/// The coupling is A B with <B(t)B(0)> = C(t) = int_0^inf dw J(w) [coth(w/2 theta) cos wt - i sin wt].
/// Reorganisation: lambda = int_0^inf dw J(w)/w, in rad/ns.

#include <Eigen/Core>
#include <cstddef>
#include <functional>
#include <limits>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <variant>
#include <vector>

namespace tarn::runtime {

/// J(w) = eta w (w/cutoff)^(s-1) exp(-w/cutoff); s = 1 is Ohmic. lambda = eta cutoff Gamma(s).
/// Source: Rev. Mod. Phys. 59, 1 (1987).
struct PowerLaw {
  double eta;        ///< Strength [1], >= 0. A spin-boson alpha with A = sigma_z is 2 eta.
  double cutoff;     ///< [rad/ns], > 0.
  double s = 1.0;    ///< Exponent [1], 0 < s <= 8. Below 1 gamma(0) diverges when theta > 0.
};

/// J(w) = eta w / (1 + (w/cutoff)^2). lambda = pi eta cutoff / 2. C(0) is infinite.
struct Drude {
  double eta;     ///< Strength [1], >= 0.
  double cutoff;  ///< [rad/ns], > 0.
};

/// Damped oscillator: J(w) = (2/pi) strength centre^2 width w / ((w^2-centre^2)^2 + (width w)^2).
/// The factor 2/pi makes lambda = strength. Overdamped from width = 2 centre on.
/// Source: J. Chem. Phys. 83, 4491 (1985).
struct LorentzianPeak {
  double strength;  ///< lambda [rad/ns], >= 0.
  double centre;    ///< Undamped frequency [rad/ns], > 0.
  double width;     ///< Full width at half maximum of a narrow peak [rad/ns], > 0.
};

enum class Interpolation { linear, log_log };

/// A table of J over w: interpolated between its rows, zero outside them.
struct Tabulated {
  std::vector<double> w;  ///< [rad/ns], strictly ascending, >= 0 (> 0 for log_log), 2 rows or more.
  std::vector<double> j;  ///< [rad/ns], same length, >= 0 (> 0 for log_log).
  Interpolation interpolation = Interpolation::linear;
};

/// Any J, given by a function of many w > 0 at once: evaluate(w, j) writes w.size() values.
/// The function must be safe to call from several threads. J is zero outside [low, high].
/// Between `breaks` J must be smooth enough for piecewise polynomials in w, graded to w = 0;
/// a feature narrower than 1/8 of an octave needs a break near it to be sure to be seen.
struct Sampled {
  std::function<void(std::span<const double> w, double* j)> evaluate;
  double low = 0.0;                                         ///< [rad/ns]
  double high = std::numeric_limits<double>::infinity();    ///< [rad/ns], > low.
  std::vector<double> breaks = {};                          ///< Kinks, jumps, narrow peaks [rad/ns].
};

using Component = std::variant<PowerLaw, Drude, LorentzianPeak, Tabulated, Sampled>;

/// The sum of its components; empty is no bath at all (J = 0).
using SpectralDensity = std::vector<Component>;

enum class BathErrorCode {
  out_of_range,           ///< A parameter is NaN, infinite or outside `range`.
  bad_table,              ///< Rows out of order, too few, or of unequal number.
  negative_density,       ///< J < 0 or not finite at w = `value`.
  zero_rate_diverges,     ///< J/w has no limit at w = 0, so gamma(0) is infinite.
  times_diverge,          ///< int |C| dt does not converge: no bath times.
};

/// Why a bath is refused. `component` is the row in the SpectralDensity.
struct BathError {
  BathErrorCode code;
  std::size_t component;
  std::string_view parameter;
  double value;
  std::string_view range;
};

/// One sentence with the remedy, lower case, no full stop.
std::string to_text(const BathError& error);

/// The first fault found, components and parameters in declared order.
std::optional<BathError> find_fault(const SpectralDensity& density);

/// J of one component at every w (any sign), in rad/ns. Shape: (n) in, (n) out.
Eigen::ArrayXd spectral_density(const Component& component, const Eigen::Ref<const Eigen::ArrayXd>& w);

/// J(w)/w, the even function, for w >= 0 [1]; at w = 0 its limit, +infinity where there is none.
/// Shape: (n) in, (n) out.
Eigen::ArrayXd density_over_w(const Component& component, const Eigen::Ref<const Eigen::ArrayXd>& w);

/// J just right of row `row` of a table minus J just left of it, both continued smoothly to
/// w > 0, in rad/ns: zero at the row itself unless J jumps there.
double density_step(const Tabulated& table, std::size_t row, double w);

/// Where J lives [rad/ns]: J is negligible (below 1e-18 of its maximum) outside [low, high];
/// `scale` is where w J is largest, the frequency that sets time scales.
struct Support {
  double low;
  double high;
  double scale;
};
Support support(const Component& component);

}  // namespace tarn::runtime
