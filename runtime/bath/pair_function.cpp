#include "runtime/bath/pair_function.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include "lang/support/check.h"
#include "runtime/bath/pair_panels.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {

using Eigen::ArrayXd;
using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

VectorXd chebyshev_nodes(Index count) {
  const ArrayXd i = ArrayXd::LinSpaced(count, 0.0, static_cast<double>(count) - 1.0);
  return -((i + 0.5) * (std::numbers::pi / static_cast<double>(count))).cos();
}

VectorXd chebyshev_weights(Index count) {
  const ArrayXd i = ArrayXd::LinSpaced(count, 0.0, static_cast<double>(count) - 1.0);
  VectorXd weight = ((i + 0.5) * (std::numbers::pi / static_cast<double>(count))).sin();
  for (Index k = 1; k < count; k += 2) weight[k] = -weight[k];
  return weight;
}

void lagrange_values(const VectorXd& node, const VectorXd& weight, double u, double* value) {
  const Index count = node.size();
  double sum = 0.0;
  for (Index i = 0; i < count; ++i) {
    const double difference = u - node[i];
    if (difference == 0.0) {
      std::fill(value, value + count, 0.0);
      value[i] = 1.0;
      return;
    }
    sum += value[i] = weight[i] / difference;
  }
  for (Index i = 0; i < count; ++i) value[i] /= sum;
}

PairFunction::PairFunction(std::vector<double> edges, MatrixXd table, VectorXd values)
    : edges_(std::move(edges)), table_(std::move(table)), values_(std::move(values)) {
  TARN_CHECK(edges_.size() >= 2 && table_.cols() == values_.size());
  const auto panels = std::ssize(edges_) - 1;
  TARN_CHECK(table_.rows() % panels == 0);
  node_ = chebyshev_nodes(table_.rows() / panels);
  barycentric_ = chebyshev_weights(node_.size());
}

PairFunction::PairFunction(std::function<ArrayXd(const ArrayXd&)> factor)
    : exact_(std::move(factor)), values_(VectorXd::Ones(1)) {}

MatrixXd PairFunction::factors(std::span<const double> w) const {
  const Index count = std::ssize(w);
  if (exact_) return exact_(Eigen::Map<const ArrayXd>(w.data(), count)).matrix();
  MatrixXd all(count, rank());
  if (rank() == 0) return all;
  // Rows of the table are read whole, columns of the result written a cache line at a time.
  constexpr Index kBlock = 8;
  RowMajor block(kBlock, rank());
  Eigen::RowVectorXd weight(node_.size());
  const double slack = 1e-9 * (edges_.back() - edges_.front());
  for (Index first = 0; first < count; first += kBlock) {
    const Index rows = std::min(kBlock, count - first);
    for (Index i = 0; i < rows; ++i) {
      const double x = w[static_cast<std::size_t>(first + i)];
      TARN_CHECK(x >= edges_.front() - slack && x <= edges_.back() + slack);
      const auto upper = std::upper_bound(edges_.begin() + 1, edges_.end() - 1, x);
      const Index panel = upper - edges_.begin() - 1;
      const double left = *(upper - 1);
      lagrange_values(node_, barycentric_, ((x - left) - (*upper - x)) / (*upper - left), weight.data());
      block.row(i).noalias() = weight * table_.middleRows(panel * node_.size(), node_.size());
    }
    all.middleRows(first, rows) = block.topRows(rows);
  }
  return all;
}

double PairFunction::operator()(double w, double other) const {
  const std::array<double, 2> both = {w, other};
  const MatrixXd u = factors(both);
  return u.row(0).cwiseProduct(u.row(1)).dot(values_);
}

Decomposition decompose(const MatrixXd& matrix) {
  const Eigensystem<double> system = eigensystem(matrix);
  TARN_CHECK(system.converged);
  std::vector<Index> order(static_cast<std::size_t>(matrix.rows()));
  for (std::size_t i = 0; i < order.size(); ++i) order[i] = static_cast<Index>(i);
  const VectorXd& value = system.values;
  std::sort(order.begin(), order.end(), [&](Index a, Index b) { return std::abs(value[a]) > std::abs(value[b]); });
  Decomposition d{VectorXd(matrix.rows()), MatrixXd(matrix.rows(), matrix.rows())};
  for (std::size_t i = 0; i < order.size(); ++i) {
    d.values[static_cast<Index>(i)] = value[order[i]];
    d.vectors.col(static_cast<Index>(i)) = system.vectors.col(order[i]);
  }
  return d;
}

void keep_above(Decomposition& d, double smallest) {
  Index kept = 0;
  while (kept < d.values.size() && std::abs(d.values[kept]) > smallest) ++kept;
  d.values.conservativeResize(kept);
  d.vectors.conservativeResize(Eigen::NoChange, kept);
}

}  // namespace tarn::runtime
