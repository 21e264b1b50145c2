#include "runtime/bath/thermal_bath.h"

#include <cmath>
#include <numbers>

namespace tarn::runtime {
namespace {

using Eigen::ArrayXd;
using ArrayRef = Eigen::Ref<const ArrayXd>;
constexpr double kTwoPi = 2.0 * std::numbers::pi;

bool has_closed_forms(const Component& component) {
  return !std::holds_alternative<Tabulated>(component) && !std::holds_alternative<Sampled>(component);
}

double closed_reorganisation(const Component& component) {
  if (const auto* c = std::get_if<PowerLaw>(&component)) return c->eta * c->cutoff * std::tgamma(c->s);
  if (const auto* c = std::get_if<Drude>(&component)) return 0.25 * kTwoPi * c->eta * c->cutoff;
  return std::get<LorentzianPeak>(component).strength;
}

/// w/(1 - exp(-w/theta)) for w >= 0, its limit theta at w = 0.
double bose_weight(double w, double theta) {
  if (theta == 0.0 || w == 0.0) return w == 0.0 ? theta : w;
  return w / -std::expm1(-w / theta);
}

/// gamma(|w|) of one component; 0 * infinity does not arise at theta = 0.
ArrayXd downward_rate(const Component& component, double theta, const ArrayXd& size) {
  const ArrayXd weight = size.unaryExpr([theta](double w) { return bose_weight(w, theta); });
  const ArrayXd rate = kTwoPi * density_over_w(component, size) * weight;
  return (weight == 0.0).select(0.0, rate);
}

}  // namespace

ThermalBath::ThermalBath(SpectralDensity density, double theta) : density_(std::move(density)), theta_(theta) {
  for (const Component& component : density_) {
    std::shared_ptr<const DensityPanels> panels;
    if (!has_closed_forms(component)) panels = std::make_shared<const DensityPanels>(expand_density(component, theta));
    panels_.push_back(std::move(panels));
  }
}

Result<ThermalBath, BathError> ThermalBath::make(SpectralDensity density, double theta) {
  if (auto fault = find_fault(density)) return Unexpected{*fault};
  if (!std::isfinite(theta) || theta < 0.0)
    return Unexpected{BathError{BathErrorCode::out_of_range, 0, "temperature", theta, ">= 0"}};
  return ThermalBath(std::move(density), theta);
}

ArrayXd ThermalBath::density(const ArrayRef& w) const {
  ArrayXd sum = ArrayXd::Zero(w.size());
  for (const Component& component : density_) sum += spectral_density(component, w);
  return sum;
}

ArrayXd ThermalBath::rate(const ArrayRef& w) const {
  const ArrayXd size = w.abs();
  ArrayXd sum = ArrayXd::Zero(w.size());
  for (const Component& component : density_) sum += downward_rate(component, theta_, size);
  if (theta_ == 0.0) return (w < 0.0).select(0.0, sum);
  return (w < 0.0).select(sum * (-size / theta_).exp(), sum);
}

Result<double, BathError> ThermalBath::zero_rate() const {
  const ArrayXd zero = ArrayXd::Zero(1);
  double sum = 0.0;
  for (std::size_t row = 0; row < density_.size(); ++row) {
    const double rate = downward_rate(density_[row], theta_, zero)[0];
    if (!std::isfinite(rate)) {
      const auto* law = std::get_if<PowerLaw>(&density_[row]);
      const BathError slope{BathErrorCode::zero_rate_diverges, row, "j/w at w = 0", rate, "finite"};
      const BathError exponent{BathErrorCode::zero_rate_diverges, row, "s", law ? law->s : 0.0, ">= 1"};
      return Unexpected{law ? exponent : slope};
    }
    sum += rate;
  }
  return sum;
}

double ThermalBath::reorganisation() const {
  double sum = 0.0;
  for (std::size_t row = 0; row < density_.size(); ++row)
    sum += panels_[row] ? -panel_shift(*panels_[row], 0.0) : closed_reorganisation(density_[row]);
  return sum;
}

}  // namespace tarn::runtime
