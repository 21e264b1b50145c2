#include "runtime/bath/correlation.h"

#include <cmath>

#include "runtime/bath/power_law_bath.h"
#include "runtime/bath/rational_density.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Term = std::function<Complex(double)>;

Term rational_term(std::vector<DensityPole> poles, double theta) {
  return [poles = std::move(poles), theta](double t) { return rational_correlation(poles, theta, t); };
}

Term correlation_of_component(const ThermalBath& bath, std::size_t row) {
  const Component& component = bath.components()[row];
  const double theta = bath.theta();
  if (const auto* c = std::get_if<PowerLaw>(&component))
    return [law = *c, theta](double t) { return power_law_correlation(law, theta, t); };
  if (const auto* c = std::get_if<Drude>(&component)) return rational_term(poles_of(*c, theta), theta);
  if (const auto* c = std::get_if<LorentzianPeak>(&component)) return rational_term(poles_of(*c, theta), theta);
  auto panels = std::make_shared<const DensityPanels>(*bath.panels(row));
  return [panels](double t) { return panel_correlation(*panels, t); };
}

}  // namespace

CorrelationFunction::CorrelationFunction(const ThermalBath& bath) {
  for (std::size_t row = 0; row < bath.components().size(); ++row) terms_.push_back(correlation_of_component(bath, row));
}

Complex CorrelationFunction::at(double t) const {
  Complex sum = 0.0;
  for (const Term& term : terms_) sum += term(std::abs(t));
  return t < 0.0 ? std::conj(sum) : sum;
}

Eigen::ArrayXcd CorrelationFunction::operator()(const Eigen::Ref<const Eigen::ArrayXd>& t) const {
  Eigen::ArrayXcd c(t.size());
  for (Eigen::Index i = 0; i < t.size(); ++i) c[i] = at(t[i]);
  return c;
}

}  // namespace tarn::runtime
