#include "runtime/bath/shift.h"

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"
#include "runtime/bath/power_law_bath.h"
#include "runtime/bath/rational_density.h"

namespace tarn::runtime {
namespace {

using Eigen::ArrayXd;
using Term = std::function<double(double)>;

Term shift_term(const PowerLaw& law, double theta) {
  if (theta == 0.0 && law.s == 1.0) return [law](double w) { return cold_ohmic_shift(law.eta, law.cutoff, w); };
  const double lambda = law.eta * law.cutoff * std::tgamma(law.s);
  auto transform = std::make_shared<const PowerLawTransform>(law, theta);
  return [transform, lambda](double w) { return w == 0.0 ? -lambda : (*transform)(w).imag(); };
}

template <class Rational>
Term rational_term(const Rational& density, double theta) {
  return [poles = poles_of(density, theta), theta](double w) { return rational_transform(poles, theta, w).imag(); };
}
Term shift_term(const Drude& drude, double theta) { return rational_term(drude, theta); }
Term shift_term(const LorentzianPeak& peak, double theta) { return rational_term(peak, theta); }

Term panel_term(const ThermalBath& bath, std::size_t row) {
  auto panels = std::make_shared<const DensityPanels>(*bath.panels(row));
  return [panels](double w) { return panel_shift(*panels, w); };
}

Term component_term(const ThermalBath& bath, std::size_t row) {
  const Component& component = bath.components()[row];
  if (const auto* c = std::get_if<PowerLaw>(&component)) return shift_term(*c, bath.theta());
  if (const auto* c = std::get_if<Drude>(&component)) return shift_term(*c, bath.theta());
  if (const auto* c = std::get_if<LorentzianPeak>(&component)) return shift_term(*c, bath.theta());
  return panel_term(bath, row);
}

void append_kinks(const Component& component, std::vector<double>& kinks) {
  if (const auto* c = std::get_if<Tabulated>(&component)) kinks.insert(kinks.end(), c->w.begin(), c->w.end());
  if (const auto* c = std::get_if<Sampled>(&component)) {
    kinks.insert(kinks.end(), c->breaks.begin(), c->breaks.end());
    kinks.push_back(c->low);
    if (std::isfinite(c->high)) kinks.push_back(c->high);
  }
}

}  // namespace

ShiftFunction::ShiftFunction(const ThermalBath& bath) : kinks_{0.0}, lambda_(bath.reorganisation()) {
  for (std::size_t row = 0; row < bath.components().size(); ++row) {
    terms_.push_back(component_term(bath, row));
    append_kinks(bath.components()[row], kinks_);
  }
  std::sort(kinks_.begin(), kinks_.end());
  kinks_.erase(std::unique(kinks_.begin(), kinks_.end()), kinks_.end());
}

double ShiftFunction::at(double w) const {
  double sum = 0.0;
  for (const Term& term : terms_) sum += term(w);
  return sum;
}

ArrayXd ShiftFunction::operator()(const Eigen::Ref<const ArrayXd>& w) const {
  return w.unaryExpr([this](double x) { return at(x); });
}

namespace {

PanelSeries tabulate(const ShiftFunction& shift, double w_max, double tolerance) {
  std::vector<double> edges = {-w_max, w_max};
  for (const double kink : shift.kinks()) {
    if (kink >= w_max) continue;
    edges.push_back(kink);
    if (kink > 0.0) edges.push_back(-kink);
  }
  std::sort(edges.begin(), edges.end());
  const BatchFunction values = [&shift](std::span<const double> w, double* s) {
    for (std::size_t i = 0; i < w.size(); ++i) s[i] = shift.at(w[i]);
  };
  return PanelSeries::expand(values, edges, {0.0, tolerance * shift.scale()});
}

}  // namespace

ShiftTable::ShiftTable(ShiftFunction shift, double w_max, double tolerance) : shift_(std::move(shift)), w_max_(w_max) {
  TARN_CHECK(w_max > 0.0 && tolerance > 0.0);
  series_ = tabulate(shift_, w_max, tolerance);
}

ArrayXd ShiftTable::operator()(const Eigen::Ref<const ArrayXd>& w) const {
  return w.unaryExpr([this](double x) { return std::abs(x) <= w_max_ ? series_.value(x) : shift_.at(x); });
}

}  // namespace tarn::runtime
