#include "runtime/validity/window.h"

#include <algorithm>
#include <cmath>
#include <fmt/format.h>

#include "lang/support/check.h"

namespace tarn::runtime {

double window_heating(const Eigen::VectorXd& energies, std::span<const Eigen::MatrixXcd> elements,
                      std::span<const std::function<void(std::span<const double>, double*)>> rates,
                      std::span<const std::function<void(std::span<const double>, double*)>> averaged) {
  std::vector<double> w;
  for (Eigen::Index m = 0; m < energies.size(); ++m)
    for (Eigen::Index n = 0; n < m; ++n) {
      w.push_back(energies[m] - energies[n]);
      w.push_back(energies[n] - energies[m]);
    }
  std::vector<double> exact(w.size()), blurred(w.size()), sum_exact(w.size(), 0.0), sum_blurred(w.size(), 0.0);
  for (std::size_t c = 0; c < elements.size(); ++c) {
    rates[c](w, exact.data());
    averaged[c](w, blurred.data());
    std::size_t at = 0;
    for (Eigen::Index m = 0; m < energies.size(); ++m)
      for (Eigen::Index n = 0; n < m; ++n, at += 2)
        for (std::size_t k = at; k < at + 2; ++k) {
          sum_exact[k] += std::norm(elements[c](m, n)) * exact[k];
          sum_blurred[k] += std::norm(elements[c](m, n)) * blurred[k];
        }
  }
  double worst = 0;
  for (std::size_t k = 0; k < w.size(); k += 2) {
    const double all = sum_exact[k] + sum_exact[k + 1], blurred_all = sum_blurred[k] + sum_blurred[k + 1];
    if (all > 0 && blurred_all > 0) worst = std::max(worst, std::abs(sum_blurred[k + 1] / blurred_all - sum_exact[k + 1] / all));
  }
  return worst;
}

WindowChange window_change(std::span<const std::string> names, std::span<const double> scales, std::span<const double> answers,
                           std::span<const double> halved, std::span<const double> doubled) {
  const std::size_t count = answers.size();
  TARN_CHECK(names.size() == count && scales.size() == count && halved.size() == count && doubled.size() == count);
  WindowChange change;
  double largest = -1;
  for (std::size_t k = 0; k < count; ++k) {
    change.halved.push_back(halved[k] - answers[k]);
    change.doubled.push_back(doubled[k] - answers[k]);
    const double moved = std::max(std::abs(change.halved[k]), std::abs(change.doubled[k])) / scales[k];
    if (!(moved > largest)) continue;
    largest = moved;
    change.largest = k;
  }
  if (largest >= 0)
    change.sentence = fmt::format("half the window moves `{}` by {:.2g} of its scale, twice the window by {:.2g}", names[change.largest],
                                  change.halved[change.largest] / scales[change.largest], change.doubled[change.largest] / scales[change.largest]);
  return change;
}

}  // namespace tarn::runtime
