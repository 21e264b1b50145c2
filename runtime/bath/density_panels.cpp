#include "runtime/bath/density_panels.h"

#include <algorithm>
#include <cmath>

namespace tarn::runtime {
namespace {

constexpr double kRelative = 1e-13;
/// Panels below this part of the frequency scale are left to bisection.
constexpr double kSmallestOctave = 1e-12;

/// Edges an octave apart from the top of the support down, with the density's own breaks.
std::vector<double> panel_edges(const Component& component) {
  const Support s = support(component);
  std::vector<double> edges = {s.low, s.high};
  if (const auto* table = std::get_if<Tabulated>(&component)) return table->w;
  for (double w = 0.5 * s.high; w > s.low && w > kSmallestOctave * s.scale; w *= 0.5) edges.push_back(w);
  if (const auto* sampled = std::get_if<Sampled>(&component))
    for (const double w : sampled->breaks)
      if (w > s.low && w < s.high) edges.push_back(w);
  std::sort(edges.begin(), edges.end());
  edges.erase(std::unique(edges.begin(), edges.end()), edges.end());
  return edges;
}

}  // namespace

DensityPanels expand_density(const Component& component, double theta) {
  const std::vector<double> edges = panel_edges(component);
  if (edges.size() < 2) return {};
  using Map = Eigen::Map<const Eigen::ArrayXd>;
  const BatchFunction plain = [&component](std::span<const double> w, double* y) {
    Eigen::Map<Eigen::ArrayXd>(y, std::ssize(w)) = spectral_density(component, Map(w.data(), std::ssize(w)));
  };
  const double scale = support(component).scale;
  double largest = 0.0;
  plain(std::span(&scale, 1), &largest);
  const PanelTolerance tolerance{kRelative, 1e-2 * kRelative * largest};
  DensityPanels panels{PanelSeries::expand(plain, edges, tolerance), {}};
  if (theta == 0.0) {
    panels.thermal = panels.plain;
    return panels;
  }
  const BatchFunction thermal = [&component, theta](std::span<const double> w, double* y) {
    const Map x(w.data(), std::ssize(w));
    Eigen::Map<Eigen::ArrayXd>(y, std::ssize(w)) = spectral_density(component, x) / (x / (2.0 * theta)).tanh();
  };
  panels.thermal = PanelSeries::expand(thermal, edges, tolerance);
  return panels;
}

double panel_shift(const DensityPanels& panels, double w) {
  const double odd = w == 0.0 ? 0.0 : panels.thermal.cauchy(w) - panels.thermal.cauchy(-w);
  return 0.5 * (odd + panels.plain.cauchy(w) + panels.plain.cauchy(-w));
}

std::complex<double> panel_correlation(const DensityPanels& panels, double t) {
  return {panels.thermal.fourier(t).real(), panels.plain.fourier(t).imag()};
}

}  // namespace tarn::runtime
