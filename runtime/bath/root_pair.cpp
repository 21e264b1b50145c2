#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include "lang/support/check.h"
#include "runtime/bath/gauss_rule.h"
#include "runtime/bath/pair_function.h"
#include "runtime/bath/pair_panels.h"
#include "runtime/bath/shift.h"

namespace tarn::runtime {
namespace {

using Eigen::ArrayXd;
using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

/// f is made to this part of lambda, as far as its panels allow.
constexpr double kTolerance = 3e-10;
constexpr Index kPanelNodes = 20;  // of a panel in w, as many as PanelSeries has terms
constexpr Index kPanelChecks = 40;

/// Where sqrt(gamma) is not smooth (finest = 0) or varies over `finest` only.
struct RoughPoint {
  double w;
  double finest;
};

std::vector<RoughPoint> rough_points(const ThermalBath& bath, const ShiftFunction& shift) {
  std::vector<RoughPoint> all;
  for (const DensityKink& kink : shift.kinks())
    for (const double w : {kink.w, -kink.w}) all.push_back({w, 0.0});
  for (const Component& component : bath.components())
    if (const auto* peak = std::get_if<LorentzianPeak>(&component))
      for (const double w : {peak->centre, -peak->centre}) all.push_back({w, 0.25 * peak->width});
  return all;
}

/// The length on which sqrt(gamma) is smooth: its branch points lie about so far from the real axis.
double smooth_length(const ThermalBath& bath, double longest) {
  double smooth = bath.theta() > 0.0 ? std::min(longest, 2.0 * std::numbers::pi * bath.theta()) : longest;
  for (const Component& component : bath.components()) {
    if (const auto* law = std::get_if<PowerLaw>(&component)) smooth = std::min(smooth, 6.0 * law->cutoff);
    if (const auto* drude = std::get_if<Drude>(&component)) smooth = std::min(smooth, drude->cutoff);
    if (const auto* peak = std::get_if<LorentzianPeak>(&component)) smooth = std::min(smooth, 0.5 * peak->width);
  }
  return smooth;
}

/// Panels in w: where S, which has the kinks of f, is a series to the tolerance, and no longer than what f is
/// smooth over across its diagonal, twice the length for sqrt(gamma).
std::vector<double> frequency_edges(const ThermalBath& bath, const ShiftFunction& shift, double w_max) {
  std::vector<double> breaks = {-w_max, 0.0, w_max};
  for (const DensityKink& kink : shift.kinks())
    for (const double w : {kink.w, -kink.w})
      if (std::abs(w) < w_max) breaks.push_back(w + 0.0);
  std::sort(breaks.begin(), breaks.end());
  breaks.erase(std::unique(breaks.begin(), breaks.end()), breaks.end());
  const BatchFunction values = [&shift](std::span<const double> w, double* s) {
    for (std::size_t i = 0; i < w.size(); ++i) s[i] = shift.at(w[i]);
  };
  // The cost grows as the cube of the panels, so many kinks are graded less, and narrow peaks not resolved.
  constexpr std::size_t kMostPanels = 40;
  constexpr double kCoarser = 10.0;
  constexpr double kLonger = 1.4;
  double longest = 2.5 * smooth_length(bath, w_max);
  for (double tolerance = kTolerance;; tolerance *= kCoarser, longest *= kLonger) {
    const std::vector<double> rough = PanelSeries::expand(values, breaks, {0.0, tolerance * shift.scale()}).edges();
    std::vector<double> edges = {rough.front()};
    for (std::size_t i = 0; i + 1 < rough.size(); ++i) {
      const double parts = std::ceil((rough[i + 1] - rough[i]) / longest);
      for (double k = 1.0; k < parts; ++k) edges.push_back(rough[i] + (rough[i + 1] - rough[i]) * (k / parts));
      edges.push_back(rough[i + 1]);
    }
    if (edges.size() <= kMostPanels + 1 || edges.size() == breaks.size()) return edges;
  }
}

/// Edges of the panels in x: growing from next to nothing to the scale on which sqrt(gamma) varies, even while
/// w + x and w - x cross what it has, growing again where it falls.
std::vector<double> distance_edges(const ThermalBath& bath, double w_max) {
  constexpr double kGrowth = 3.0;
  constexpr double kLaterGrowth = 1.5;
  constexpr double kNearest = 1e-10;
  constexpr double kFarthest = 1e12;
  constexpr double kMostEven = 250.0;
  double smooth = smooth_length(bath, w_max);
  double high = 0.0;
  double scale = 0.0;
  double even_to = 2.0 * w_max + 4.0 * smooth;
  for (const Component& component : bath.components()) {
    const Support s = support(component);
    scale = std::max(scale, s.scale);
    high = std::max(high, std::min(s.high, kFarthest * s.scale));
    if (const auto* peak = std::get_if<LorentzianPeak>(&component))
      even_to = std::max(even_to, w_max + peak->centre + 10.0 * peak->width);
  }
  smooth = std::max(smooth, even_to / kMostEven);
  std::vector<double> edges = {kNearest * std::min(smooth, scale)};
  while (edges.back() < w_max + high) {
    const double x = edges.back();
    const double even = x < even_to ? smooth : (kLaterGrowth - 1.0) * x;
    edges.push_back(x + std::min((kGrowth - 1.0) * x, even));
  }
  return edges;
}

/// sqrt(gamma(w + x)) and sqrt(gamma(w - x)) for one w as polynomials on every panel in x: the values at its Gauss nodes.
class RootRows {
 public:
  RootRows(const ThermalBath& bath, std::vector<RoughPoint> rough, std::vector<double> edges)
      : bath_(bath), rough_(std::move(rough)), edges_(std::move(edges)), rule_(gauss_rule()) {
    const Index panels = std::ssize(edges_) - 1;
    x_.resize(panels * kGauss);
    weight_.resize(x_.size());
    for (Index p = 0; p < panels; ++p) {
      const double half = 0.5 * (right(p) - left(p));
      x_.segment(p * kGauss, kGauss) = left(p) + half * (1.0 + rule_.node);
      weight_.segment(p * kGauss, kGauss) = half * rule_.weight / x_.segment(p * kGauss, kGauss);
    }
  }

  Index size() const { return x_.size(); }
  /// Of the nodes, 1/x included.
  const ArrayXd& weight() const { return weight_; }

  ArrayXd row(double w, double sign) const {
    ArrayXd root = bath_.rate(w + sign * x_).sqrt();
    for (Index p = 0; p + 1 < std::ssize(edges_); ++p)
      if (const auto pieces = pieces_of(p, w, sign); pieces.size() > 2)
        root.segment(p * kGauss, kGauss) = projected(p, pieces, w, sign);
    return root;
  }

 private:
  double left(Index p) const { return edges_[static_cast<std::size_t>(p)]; }
  double right(Index p) const { return edges_[static_cast<std::size_t>(p) + 1]; }

  /// Edges that cut panel p where w + sign x meets rough points, finer towards them.
  std::vector<double> pieces_of(Index p, double w, double sign) const {
    constexpr double kNearPole = 0.3;
    constexpr double kFinest = 1e-3;
    const double length = right(p) - left(p);
    std::vector<double> cuts = {left(p), right(p)};
    for (const auto& [point, finest] : rough_) {
      const double at = sign * (point - w);
      if (at < left(p) - kNearPole * length || at > right(p) + kNearPole * length) continue;
      const auto cut = [&](double x) {
        if (x > left(p) && x < right(p)) cuts.push_back(x);
      };
      cut(at);
      for (double step = length; step > std::max(finest, kFinest * length); step *= 0.25) {
        cut(at - step);
        cut(at + step);
      }
    }
    std::sort(cuts.begin(), cuts.end());
    cuts.erase(std::unique(cuts.begin(), cuts.end()), cuts.end());
    return cuts;
  }

  /// The best polynomial through what has kinks: its product with any other polynomial of the panel has the
  /// right integral, and the other's kinks lie elsewhere.
  ArrayXd projected(Index p, const std::vector<double>& pieces, double w, double sign) const {
    const Index count = (std::ssize(pieces) - 1) * kGauss;
    ArrayXd x(count);
    ArrayXd weight(count);
    for (Index i = 0; i + 1 < std::ssize(pieces); ++i) {
      const double from = pieces[static_cast<std::size_t>(i)];
      const double half = 0.5 * (pieces[static_cast<std::size_t>(i) + 1] - from);
      x.segment(i * kGauss, kGauss) = from + half * (1.0 + rule_.node);
      weight.segment(i * kGauss, kGauss) = half * rule_.weight;
    }
    const double half = 0.5 * (right(p) - left(p));
    const VectorXd value = (weight / half * bath_.rate(w + sign * x).sqrt()).matrix();
    const MatrixXd legendre = legendre_values((x - left(p)) / half - 1.0);
    return (rule_.expand * (legendre.transpose() * value)).array();
  }

  const ThermalBath& bath_;
  std::vector<RoughPoint> rough_;
  std::vector<double> edges_;
  const GaussRule& rule_;
  ArrayXd x_;
  ArrayXd weight_;
};

/// f at all pairs of w.
MatrixXd principal_values(const RootRows& rows, const ArrayXd& w) {
  const VectorXd root_weight = rows.weight().sqrt();
  MatrixXd above(rows.size(), w.size());
  MatrixXd below(rows.size(), w.size());
  for (Index i = 0; i < w.size(); ++i) {
    above.col(i) = rows.row(w[i], 1.0).matrix().cwiseProduct(root_weight);
    below.col(i) = rows.row(w[i], -1.0).matrix().cwiseProduct(root_weight);
  }
  MatrixXd f = MatrixXd::Zero(w.size(), w.size());
  constexpr double kFactor = 0.5 / std::numbers::pi;
  f.selfadjointView<Eigen::Lower>().rankUpdate(below.transpose(), kFactor);
  f.selfadjointView<Eigen::Lower>().rankUpdate(above.transpose(), -kFactor);
  return f.selfadjointView<Eigen::Lower>();
}

/// Off the nodes: half of them spread evenly, half towards w = 0.
ArrayXd check_places(double w_max) {
  ArrayXd w(kPanelChecks);
  for (Index i = 0; i < kPanelChecks; ++i) {
    const double turns = static_cast<double>(i + 1) * std::numbers::phi;
    const double even = 2.0 * (turns - std::floor(turns)) - 1.0;
    w[i] = w_max * (i % 2 == 0 ? even : std::copysign(std::pow(10.0, -4.0 * std::abs(even)), even));
  }
  return w;
}

}  // namespace

PairFunctions root_pair(const ThermalBath& bath, double w_max) {
  TARN_CHECK(w_max > 0.0 && std::isfinite(w_max));
  TARN_CHECK(bath.zero_rate().has_value());
  const ShiftFunction shift(bath);
  if (shift.scale() == 0.0) return {};
  const std::vector<double> edges = frequency_edges(bath, shift, w_max);
  const Index panels = std::ssize(edges) - 1;
  const Index count = panels * kPanelNodes;
  ArrayXd w(count + kPanelChecks);
  const ArrayXd node = chebyshev_nodes(kPanelNodes);
  for (Index p = 0; p < panels; ++p) {
    const double left = edges[static_cast<std::size_t>(p)];
    const double right = edges[static_cast<std::size_t>(p) + 1];
    w.segment(p * kPanelNodes, kPanelNodes) = 0.5 * ((1.0 - node) * left + (1.0 + node) * right);
  }
  w.tail(kPanelChecks) = check_places(w_max);
  const RootRows rows(bath, rough_points(bath, shift), distance_edges(bath, w_max));
  const MatrixXd f = principal_values(rows, w);

  // The quadrature against S, what it should be on the diagonal; the interpolation against the quadrature.
  double quadrature = 0.0;
  for (Index i = 0; i < count; i += kPanelNodes / 4) quadrature = std::max(quadrature, std::abs(f(i, i) - shift.at(w[i])));
  for (Index i = count; i < w.size(); ++i) quadrature = std::max(quadrature, std::abs(f(i, i) - shift.at(w[i])));
  const double smallest = std::max(0.1 * kTolerance * shift.scale(), 0.1 * quadrature);
  Decomposition s = decompose(f.topLeftCorner(count, count));
  keep_above(s, smallest);
  PairFunctions pair{PairFunction([bath](const ArrayXd& at) { return bath.rate(at).sqrt().eval(); }),
                     {edges, std::move(s.vectors), std::move(s.values)}};
  const MatrixXd u = pair.shift.factors({w.data() + count, static_cast<std::size_t>(kPanelChecks)});
  const MatrixXd made = u * pair.shift.values().asDiagonal() * u.transpose();
  pair.shift.set_error(quadrature + (made - f.bottomRightCorner(kPanelChecks, kPanelChecks)).cwiseAbs().maxCoeff());
  return pair;
}

}  // namespace tarn::runtime
