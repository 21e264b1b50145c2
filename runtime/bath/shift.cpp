#include "runtime/bath/shift.h"

#include <algorithm>
#include <array>
#include <cmath>

#include "lang/support/check.h"
#include "runtime/bath/power_law_bath.h"
#include "runtime/bath/rational_density.h"

namespace tarn::runtime {
namespace {

using Eigen::ArrayXd;
using ShiftTerm = std::function<double(double)>;

ShiftTerm shift_term(const PowerLaw& law, double theta) {
  if (theta == 0.0 && law.s == 1.0) return [law](double w) { return cold_ohmic_shift(law.eta, law.cutoff, w); };
  const double lambda = law.eta * law.cutoff * std::tgamma(law.s);
  auto transform = std::make_shared<const PowerLawTransform>(law, theta);
  return [transform, lambda](double w) { return w == 0.0 ? -lambda : (*transform)(w).imag(); };
}

template <class Rational>
ShiftTerm rational_shift_term(const Rational& density, double theta) {
  return [poles = poles_of(density, theta), theta](double w) { return rational_transform(poles, theta, w).imag(); };
}
ShiftTerm shift_term(const Drude& drude, double theta) { return rational_shift_term(drude, theta); }
ShiftTerm shift_term(const LorentzianPeak& peak, double theta) { return rational_shift_term(peak, theta); }

ShiftTerm panel_term(const ThermalBath& bath, std::size_t row) {
  auto panels = std::make_shared<const DensityPanels>(*bath.panels(row));
  return [panels](double w) { return panel_shift(*panels, w); };
}

ShiftTerm shift_of_component(const ThermalBath& bath, std::size_t row) {
  const Component& component = bath.components()[row];
  if (const auto* c = std::get_if<PowerLaw>(&component)) return shift_term(*c, bath.theta());
  if (const auto* c = std::get_if<Drude>(&component)) return shift_term(*c, bath.theta());
  if (const auto* c = std::get_if<LorentzianPeak>(&component)) return shift_term(*c, bath.theta());
  return panel_term(bath, row);
}

void append_kinks(const Component& component, std::vector<DensityKink>& kinks) {
  if (const auto* c = std::get_if<Tabulated>(&component)) {
    const auto table = std::make_shared<const Tabulated>(*c);
    for (std::size_t row = 0; row < c->w.size(); ++row)
      if (c->w[row] > 0.0) kinks.push_back({c->w[row], table, row});
  }
  if (const auto* c = std::get_if<Sampled>(&component)) {
    for (const double w : c->breaks) kinks.push_back({w, nullptr, 0});
    kinks.push_back({c->low, nullptr, 0});
    if (std::isfinite(c->high)) kinks.push_back({c->high, nullptr, 0});
  }
}

/// 1/(1 - exp(-w/theta)), w != 0.
double occupation_factor(double w, double theta) {
  if (theta == 0.0) return w > 0.0 ? 1.0 : 0.0;
  return -1.0 / std::expm1(-w / theta);
}

}  // namespace

ShiftFunction::ShiftFunction(const ThermalBath& bath)
    : kinks_{{0.0, nullptr, 0}}, theta_(bath.theta()), lambda_(bath.reorganisation()) {
  for (std::size_t row = 0; row < bath.components().size(); ++row) {
    terms_.push_back(shift_of_component(bath, row));
    append_kinks(bath.components()[row], kinks_);
  }
  std::stable_sort(kinks_.begin(), kinks_.end(), [](const DensityKink& a, const DensityKink& b) { return a.w < b.w; });
}

double ShiftFunction::at(double w) const {
  double sum = 0.0;
  for (const ShiftTerm& term : terms_) sum += term(w);
  return sum;
}

ArrayXd ShiftFunction::operator()(const Eigen::Ref<const ArrayXd>& w) const {
  return w.unaryExpr([this](double x) { return at(x); });
}

namespace {

constexpr std::array<double, 3> kCheckPlaces = {0.0005, 0.5, 0.9995};

std::vector<double> table_edges(const ShiftFunction& shift, double w_max) {
  std::vector<double> edges = {-w_max, w_max};
  for (const DensityKink& kink : shift.kinks()) {
    if (kink.w >= w_max) continue;
    edges.push_back(kink.w);
    edges.push_back(-kink.w);
  }
  for (double& edge : edges) edge += 0.0;  // no negative zero
  std::sort(edges.begin(), edges.end());
  edges.erase(std::unique(edges.begin(), edges.end()), edges.end());
  return edges;
}

}  // namespace

ShiftTable::ShiftTable(ShiftFunction shift, double w_max, double tolerance)
    : shift_(std::move(shift)), w_max_(w_max), edges_(table_edges(shift_, w_max)) {
  TARN_CHECK(w_max > 0.0 && tolerance > 0.0);
  // The terms that are left out add up to more than the largest of them where S has a
  // logarithm at a panel's end; so the table is made finer than asked, then checked.
  constexpr double kMargin = 0.05;
  constexpr int kAttempts = 3;
  double aim = kMargin * tolerance;
  for (int attempt = 0; attempt < kAttempts; ++attempt, aim *= kMargin)
    if (build(aim) <= tolerance) return;
}

double ShiftTable::singular_part(double w) const {
  const auto upper = std::upper_bound(edges_.begin(), edges_.end(), w);
  if (upper == edges_.begin() || upper == edges_.end()) return 0.0;
  double sum = 0.0;
  for (const double edge : {*(upper - 1), *upper}) {
    // b(w) has a pole at w = 0: next to it the plain series serves.
    if (edge == 0.0) return 0.0;
    const double size = std::abs(edge);
    auto kink = std::lower_bound(shift_.kinks().begin(), shift_.kinks().end(), size,
                                 [](const DensityKink& k, double x) { return k.w < x; });
    double step = 0.0;
    for (; kink != shift_.kinks().end() && kink->w == size; ++kink)
      if (kink->table) step += density_step(*kink->table, kink->row, std::abs(w));
    if (step != 0.0 && w != edge) sum += step * std::log(std::abs(w - edge));
  }
  return sum == 0.0 ? 0.0 : sum * occupation_factor(w, shift_.theta());
}

double ShiftTable::build(double tolerance) {
  const BatchFunction values = [this](std::span<const double> w, double* s) {
    for (std::size_t i = 0; i < w.size(); ++i) s[i] = shift_.at(w[i]) - singular_part(w[i]);
  };
  series_ = PanelSeries::expand(values, edges_, {tolerance, tolerance * shift_.scale()});
  evaluations_ += series_.evaluations() + kCheckPlaces.size() * series_.panel_count();
  return check();
}

double ShiftTable::check() {
  const std::vector<double> edges = series_.edges();
  double relative = 0.0;
  error_ = 0.0;
  for (std::size_t i = 0; i + 1 < edges.size(); ++i) {
    double size = shift_.scale();
    double error = 0.0;
    for (const double place : kCheckPlaces) {
      const double w = (1.0 - place) * edges[i] + place * edges[i + 1];
      const double exact = shift_.at(w);
      size = std::max(size, std::abs(exact));
      error = std::max(error, std::abs(series_.value(w) + singular_part(w) - exact));
    }
    error_ = std::max(error_, error);
    if (error > 0.0) relative = std::max(relative, error / size);
  }
  return relative;
}

ArrayXd ShiftTable::operator()(const Eigen::Ref<const ArrayXd>& w) const {
  return w.unaryExpr([this](double x) {
    return std::abs(x) <= w_max_ ? series_.value(x) + singular_part(x) : shift_.at(x);
  });
}

}  // namespace tarn::runtime
