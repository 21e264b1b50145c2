#include "runtime/generator/stationary.h"

#include <algorithm>
#include <cmath>
#include <vector>

#include "runtime/linear/general.h"

namespace tarn::runtime {
namespace {

using Index = Eigen::Index;

/// Modes whose rates and frequencies differ by less than this part of the largest are one.
constexpr double kSame = 1e-9;

}  // namespace

std::optional<Eigen::MatrixXcd> stationary_state(const Eigen::MatrixXcd& map) {
  const auto n = static_cast<Index>(std::llround(std::sqrt(static_cast<double>(map.rows()))));
  // One equation is no news, since traces stay; the trace takes its place, at the size of the others.
  Eigen::MatrixXcd system = map;
  const double size = map.cwiseAbs().maxCoeff();
  system.row(0).setZero();
  for (Index k = 0; k < n; ++k) system(0, k * (n + 1)) = size;
  Eigen::VectorXcd right = Eigen::VectorXcd::Zero(map.rows());
  right[0] = size;
  const auto found = solve(system, right);
  if (!found) return std::nullopt;
  const Eigen::MatrixXcd rho = found->reshaped(n, n);
  return 0.5 * (rho + rho.adjoint());
}

std::optional<Mode> leading_mode(const Eigen::MatrixXcd& map, const Eigen::VectorXcd& x) {
  const auto modes = general_eigensystem(map);
  if (!modes) return std::nullopt;
  const Eigen::VectorXcd parts = modes->left * x;
  const double same = kSame * modes->values.cwiseAbs().maxCoeff();
  // Modes that coincide carry together what their sum is: which vectors span them is rounding.
  double best = 0, all = 0;
  Mode mode;
  std::vector<bool> counted(static_cast<std::size_t>(parts.size()), false);
  for (Index k = 0; k < parts.size(); ++k) {
    if (counted[static_cast<std::size_t>(k)]) continue;
    Eigen::VectorXcd carried = Eigen::VectorXcd::Zero(x.size());
    for (Index l = k; l < parts.size(); ++l) {
      if (std::abs(modes->values[l] - modes->values[k]) > same) continue;
      counted[static_cast<std::size_t>(l)] = true;
      carried += parts[l] * modes->right.col(l);
    }
    const double weight = carried.norm();
    all += weight;
    if (weight <= best) continue;
    best = weight;
    mode.rate = std::max(0.0, -modes->values[k].real());
    mode.frequency = modes->values[k].imag();
  }
  mode.share = all > 0 ? best / all : 0;
  return mode;
}

}  // namespace tarn::runtime
