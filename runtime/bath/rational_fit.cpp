#include "runtime/bath/rational_fit.h"

#include <Eigen/Eigenvalues>
#include <Eigen/QR>
#include <Eigen/SVD>
#include <algorithm>
#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {

using Eigen::ArrayXd;
using Eigen::ArrayXXd;
using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

RationalFit::RationalFit(ArrayXd x, ArrayXXd values, ArrayXXd weights)
    : x_(std::move(x)), values_(std::move(values)), weights_(std::move(weights)), fitted_(values_.rows(), values_.cols()) {
  TARN_CHECK(x_.size() == values_.rows() && x_.size() == weights_.rows() && values_.cols() == weights_.cols());
  for (Index c = 0; c < values_.cols(); ++c) fitted_.col(c) = values_.col(c).mean();
  error_ = ((values_ - fitted_).abs() * weights_).maxCoeff();
}

bool RationalFit::grow() {
  // With fewer samples than unknowns the weights would not be determined.
  const Index free = x_.size() - std::ssize(support_) - 1;
  if (free * values_.cols() < std::ssize(support_) + 1 || !(error_ > 0.0)) return false;
  Index worst = 0;
  ((values_ - fitted_).abs() * weights_).rowwise().maxCoeff().maxCoeff(&worst);
  if (std::find(support_.begin(), support_.end(), worst) != support_.end()) return false;
  support_.push_back(worst);
  solve();
  return true;
}

void RationalFit::solve() {
  const Index count = std::ssize(support_);
  ArrayXXd cauchy(x_.size(), count);
  for (Index j = 0; j < count; ++j) {
    cauchy.col(j) = 1.0 / (x_ - x_[support_[static_cast<std::size_t>(j)]]);
    for (const Index row : support_) cauchy(row, j) = 0.0;
  }
  MatrixXd loewner(x_.size() * values_.cols(), count);
  for (Index c = 0; c < values_.cols(); ++c)
    for (Index j = 0; j < count; ++j)
      loewner.col(j).segment(c * x_.size(), x_.size()) =
          weights_.col(c) * (values_.col(c) - values_(support_[static_cast<std::size_t>(j)], c)) * cauchy.col(j);
  // x spans many decades, and so do the columns.
  VectorXd scale = loewner.colwise().norm();
  scale = (scale.array() > 0.0).select(scale, 1.0);
  loewner *= scale.cwiseInverse().asDiagonal();
  const Eigen::HouseholderQR<MatrixXd> qr(loewner);
  const MatrixXd r = qr.matrixQR().topRows(count).triangularView<Eigen::Upper>();
  const Eigen::JacobiSVD<MatrixXd> svd(r, Eigen::ComputeFullV);
  barycentric_ = svd.matrixV().col(count - 1).cwiseQuotient(scale);

  const ArrayXd denominator = (cauchy.matrix() * barycentric_).array();
  for (Index c = 0; c < values_.cols(); ++c) {
    VectorXd weighted = barycentric_;
    for (Index j = 0; j < count; ++j) weighted[j] *= values_(support_[static_cast<std::size_t>(j)], c);
    fitted_.col(c) = (cauchy.matrix() * weighted).array() / denominator;
    for (const Index row : support_) fitted_(row, c) = values_(row, c);
  }
  error_ = ((values_ - fitted_).abs() * weights_).maxCoeff();
}

std::vector<std::complex<double>> RationalFit::poles() const {
  // sum_j b_j/(x - x_j) = 0 at the eigenvalues of diag(x) - 1 (b x)^T/sum b, but for one zero that is its own.
  const Index count = barycentric_.size();
  if (count < 2) return {};
  std::vector<Index> order(static_cast<std::size_t>(count));
  for (Index j = 0; j < count; ++j) order[static_cast<std::size_t>(j)] = j;
  const auto place = [this](Index j) { return x_[support_[static_cast<std::size_t>(j)]]; };
  std::sort(order.begin(), order.end(), [&](Index i, Index j) { return place(i) > place(j); });
  const double total = barycentric_.sum();
  MatrixXd m(count, count);
  // Graded from large to small and scaled alike in rows and columns, small eigenvalues keep their digits.
  for (Index i = 0; i < count; ++i)
    for (Index j = 0; j < count; ++j) {
      const Index row = order[static_cast<std::size_t>(i)];
      const Index column = order[static_cast<std::size_t>(j)];
      const double left = barycentric_[row] * place(row);
      const double right = barycentric_[column] * place(column);
      m(i, j) = (i == j ? place(row) : 0.0) - std::copysign(std::sqrt(std::abs(left * right)), right) / total;
    }
  const Eigen::EigenSolver<MatrixXd> solver(m, false);
  std::vector<std::complex<double>> all(solver.eigenvalues().begin(), solver.eigenvalues().end());
  all.erase(std::min_element(all.begin(), all.end(), [](auto a, auto b) { return std::abs(a) < std::abs(b); }));
  return all;
}

}  // namespace tarn::runtime
