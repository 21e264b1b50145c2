#include "runtime/validity/secular.h"

#include <algorithm>
#include <cmath>

namespace tarn::runtime {
namespace {

/// A jump of one operator: the frequency it takes from the system and the root of its rate.
struct Line {
  double frequency = 0, amplitude = 0;
};

std::vector<Line> lines_of(const Eigen::VectorXd& energies, const Eigen::MatrixXcd& elements,
                           const std::function<void(std::span<const double>, double*)>& rate) {
  const Eigen::Index levels = energies.size();
  std::vector<double> w, gamma(static_cast<std::size_t>(levels * levels));
  for (Eigen::Index m = 0; m < levels; ++m)
    for (Eigen::Index n = 0; n < levels; ++n) w.push_back(energies[m] - energies[n]);
  rate(w, gamma.data());
  std::vector<Line> lines;
  for (Eigen::Index m = 0; m < levels; ++m)
    for (Eigen::Index n = 0; n < levels; ++n) {
      const auto at = static_cast<std::size_t>(m * levels + n);
      const double amplitude = std::abs(elements(n, m)) * std::sqrt(std::max(0.0, gamma[at]));
      if (amplitude > 0) lines.push_back({w[at], amplitude});
    }
  std::sort(lines.begin(), lines.end(), [](const Line& a, const Line& b) { return a.amplitude > b.amplitude; });
  return lines;
}

}  // namespace

SecularRatio secular_ratio(const Eigen::VectorXd& energies, std::span<const Eigen::MatrixXcd> elements,
                           std::span<const std::function<void(std::span<const double>, double*)>> rates, double tolerance) {
  SecularRatio worst;
  for (std::size_t c = 0; c < elements.size(); ++c) {
    const auto lines = lines_of(energies, elements[c], rates[c]);
    for (std::size_t p = 0; p < lines.size(); ++p)
      for (std::size_t q = p + 1; q < lines.size(); ++q) {
        const double rate = lines[p].amplitude * lines[q].amplitude;
        if (rate <= worst.ratio * tolerance) break;
        const double spacing = std::abs(lines[p].frequency - lines[q].frequency);
        if (spacing > tolerance && rate > worst.ratio * spacing) worst = {rate / spacing, rate, spacing};
      }
  }
  return worst;
}

}  // namespace tarn::runtime
