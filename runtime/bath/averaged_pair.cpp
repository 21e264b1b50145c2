#include <algorithm>
#include <cmath>
#include <numbers>

#include "lang/support/check.h"
#include "runtime/bath/half_range.h"
#include "runtime/bath/pair_function.h"
#include "runtime/bath/pair_panels.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Eigen::ArrayXcd;
using Eigen::ArrayXd;
using Eigen::Index;
using Eigen::MatrixXd;

constexpr Index kNodes = 16;
/// Half a panel times Ta/2: 16 Chebyshev nodes then leave 2 J_16 of it, 2e-12.
constexpr double kPhase = 2.5;
constexpr Index kChecks = 24;

/// Nodes enough for exp(izu), |u| <= 1, to 1e-15: J_n(z) falls that far within some z^(1/3) of n = z.
Index nodes_for(double z) { return static_cast<Index>(std::ceil(z + 12.0 * std::cbrt(z) + 24.0)); }

Complex averaged_value(const ArrayXd& w, const ArrayXcd& gamma, double window, Index i, Index j) {
  const double phase = 0.5 * window * (w[j] - w[i]);
  const Complex turn = std::polar(1.0, phase);
  return (turn * gamma[i] - std::conj(turn) * gamma[j]) / Complex(0.0, 2.0 * phase);
}

/// Values at the global nodes taken to those of the panels.
MatrixXd resample(const MatrixXd& vectors, double reach, const std::vector<double>& edges) {
  const Eigen::VectorXd node = chebyshev_nodes(vectors.rows());
  const Eigen::VectorXd weight = chebyshev_weights(vectors.rows());
  const Eigen::VectorXd local = chebyshev_nodes(kNodes);
  const Index panels = std::ssize(edges) - 1;
  Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor> lagrange(panels * kNodes, vectors.rows());
  for (Index p = 0; p < panels; ++p)
    for (Index i = 0; i < kNodes; ++i) {
      const double left = edges[static_cast<std::size_t>(p)];
      const double right = edges[static_cast<std::size_t>(p) + 1];
      const double w = 0.5 * ((1.0 - local[i]) * left + (1.0 + local[i]) * right);
      lagrange_values(node, weight, w / reach, lagrange.row(p * kNodes + i).data());
    }
  return lagrange * vectors;
}

}  // namespace

PairFunctions averaged_pair(const ThermalBath& bath, double window, double w_max) {
  TARN_CHECK(w_max > 0.0 && window > 0.0);
  if (bath.reorganisation() == 0.0) return {};
  TARN_CHECK(std::isfinite(window) && std::isfinite(w_max));
  const double z = 0.5 * w_max * window;
  const Index count = nodes_for(z);
  // Behind the nodes stand pairs that the interpolation is checked with, off the nodes and the diagonal.
  ArrayXd w(count + 2 * kChecks);
  w.head(count) = w_max * chebyshev_nodes(count).array();
  for (Index i = 0; i < 2 * kChecks; ++i) {
    const double turns = static_cast<double>(i) * std::numbers::phi;
    w[count + i] = w_max * (2.0 * (turns - std::floor(turns)) - 1.0);
  }
  const GrowingHalfRange half_range(bath, window);
  const ArrayXcd gamma = half_range(window, w);
  const ArrayXcd moment = half_range.first_moment(window, w.head(count));

  MatrixXd rate(count, count);
  MatrixXd shift(count, count);
  for (Index i = 0; i < count; ++i)
    for (Index j = 0; j <= i; ++j) {
      const Complex g = i == j ? gamma[i] - moment[i] : averaged_value(w, gamma, window, i, j);
      rate(i, j) = rate(j, i) = 2.0 * g.real();
      shift(i, j) = shift(j, i) = g.imag();
    }
  Decomposition c = decompose(rate);
  Decomposition s = decompose(shift);
  constexpr double kNegligible = 1e-13;
  // c is positive: what is negative shows the rounding in all values.
  const double noise = 2.0 * std::max(0.0, -c.values.minCoeff());
  const double smallest = std::max(noise, kNegligible * c.values[0]);
  keep_above(c, smallest);
  keep_above(s, std::max(0.5 * smallest, kNegligible * std::abs(s.values[0])));

  const auto panels = std::max<Index>(1, static_cast<Index>(std::ceil(z / kPhase)));
  std::vector<double> edges;
  for (Index p = 0; p <= panels; ++p) edges.push_back(w_max * (2.0 * static_cast<double>(p) / static_cast<double>(panels) - 1.0));
  PairFunctions pair{{edges, resample(c.vectors, w_max, edges), c.values},
                     {edges, resample(s.vectors, w_max, edges), s.values}};
  double rate_error = 0.0;
  double shift_error = 0.0;
  for (Index i = count; i < w.size(); i += 2) {
    const Complex g = averaged_value(w, gamma, window, i, i + 1);
    rate_error = std::max(rate_error, std::abs(pair.rate(w[i], w[i + 1]) - 2.0 * g.real()));
    shift_error = std::max(shift_error, std::abs(pair.shift(w[i], w[i + 1]) - g.imag()));
  }
  pair.rate.set_error(rate_error + smallest + 2.0 * half_range.error());
  pair.shift.set_error(shift_error + smallest + half_range.error());
  return pair;
}

}  // namespace tarn::runtime
