#include "runtime/bath/half_range.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <vector>

#include "lang/support/check.h"
#include "runtime/bath/correlation.h"

namespace tarn::runtime {

using Eigen::ArrayXcd;
using Eigen::ArrayXd;
using Complex = std::complex<double>;

HalfRange::HalfRange(const ThermalBath& bath, double w_max, double tolerance)
    : bath_(bath), shift_(ShiftFunction(bath), w_max, tolerance) {}

ArrayXcd HalfRange::operator()(const Eigen::Ref<const ArrayXd>& w) const {
  ArrayXcd gamma(w.size());
  gamma.real() = 0.5 * bath_.rate(w);
  gamma.imag() = shift_(w);
  return gamma;
}

namespace {

/// Octaves from t_max down to where even a logarithm in C leaves nothing.
std::vector<double> time_edges(const ThermalBath& bath, double t_max) {
  constexpr double kShortest = 1e-15;
  double shortest = t_max;
  for (const Component& component : bath.components()) {
    shortest = std::min(shortest, 1.0 / support(component).scale);
    // Past its ringing a peak is smooth; before, an octave holds many periods.
    if (const auto* peak = std::get_if<LorentzianPeak>(&component)) shortest = std::min(shortest, 1.0 / peak->centre);
  }
  std::vector<double> edges = {t_max};
  while (edges.back() > kShortest * shortest) edges.push_back(0.5 * edges.back());
  edges.push_back(0.0);
  std::reverse(edges.begin(), edges.end());
  return edges;
}

}  // namespace

GrowingHalfRange::GrowingHalfRange(const ThermalBath& bath, double t_max) : t_max_(t_max) {
  TARN_CHECK(t_max > 0.0 && std::isfinite(t_max));
  const CorrelationFunction c(bath);
  const std::vector<double> edges = time_edges(bath, t_max);
  // All four series ask at nearly the same times.
  std::map<double, Complex> known;
  const auto at = [&](double t) {
    const auto [place, fresh] = known.try_emplace(t);
    if (fresh) place->second = c.at(t);
    return place->second;
  };
  double largest = 0.0;
  for (const double t : edges)
    if (t > 0.0) largest = std::max(largest, t * std::abs(at(t)));
  constexpr double kRelative = 1e-13;
  const auto expand = [&](auto&& value, double absolute) {
    const BatchFunction f = [&](std::span<const double> t, double* y) {
      for (std::size_t i = 0; i < t.size(); ++i) y[i] = value(t[i]);
    };
    return PanelSeries::expand(f, edges, {kRelative, kRelative * absolute});
  };
  correlation_ = {expand([&](double t) { return at(t).real(); }, largest / t_max),
                  expand([&](double t) { return at(t).imag(); }, largest / t_max)};
  moment_ = {expand([&](double t) { return t / t_max * at(t).real(); }, largest / t_max),
             expand([&](double t) { return t / t_max * at(t).imag(); }, largest / t_max)};
}

ArrayXcd GrowingHalfRange::transform(const Pair& pair, double t, const Eigen::Ref<const ArrayXd>& w) {
  const PanelSeries real = pair.real.until(t);
  const PanelSeries imaginary = pair.imaginary.until(t);
  return w.unaryExpr([&](double x) { return real.fourier(-x) + Complex(0.0, 1.0) * imaginary.fourier(-x); });
}

ArrayXcd GrowingHalfRange::operator()(double t, const Eigen::Ref<const ArrayXd>& w) const {
  TARN_CHECK(t >= 0.0 && t <= t_max_ * (1.0 + 1e-12));
  return transform(correlation_, t, w);
}

ArrayXcd GrowingHalfRange::first_moment(double t, const Eigen::Ref<const ArrayXd>& w) const {
  TARN_CHECK(t > 0.0 && t <= t_max_ * (1.0 + 1e-12));
  return transform(moment_, t, w) * (t_max_ / t);
}

double GrowingHalfRange::error() const {
  return correlation_.real.integral_error() + correlation_.imaginary.integral_error();
}

}  // namespace tarn::runtime
