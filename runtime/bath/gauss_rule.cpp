#include "runtime/bath/gauss_rule.h"

#include <boost/math/quadrature/gauss.hpp>

namespace tarn::runtime {

using Eigen::Index;

namespace {

GaussRule make_gauss_rule() {
  using Gauss = boost::math::quadrature::gauss<double, kGauss>;
  GaussRule rule{Eigen::ArrayXd(kGauss), Eigen::ArrayXd(kGauss), {}};
  for (Index i = 0; i < kGauss / 2; ++i) {
    const auto k = static_cast<std::size_t>(i);
    rule.node[kGauss / 2 + i] = Gauss::abscissa()[k];
    rule.node[kGauss / 2 - 1 - i] = -Gauss::abscissa()[k];
    rule.weight[kGauss / 2 + i] = rule.weight[kGauss / 2 - 1 - i] = Gauss::weights()[k];
  }
  const Eigen::VectorXd norm = Eigen::ArrayXd::LinSpaced(kGauss, 0.5, static_cast<double>(kGauss) - 0.5);
  rule.expand = legendre_values(rule.node) * norm.asDiagonal();
  return rule;
}

}  // namespace

const GaussRule& gauss_rule() {
  static const GaussRule kRule = make_gauss_rule();
  return kRule;
}

Eigen::MatrixXd legendre_values(const Eigen::ArrayXd& u) {
  Eigen::MatrixXd p(u.size(), kGauss);
  p.col(0).setOnes();
  p.col(1) = u.matrix();
  for (Index n = 1; n + 1 < kGauss; ++n) {
    const auto degree = static_cast<double>(n);
    p.col(n + 1) = ((2.0 * degree + 1.0) * u * p.col(n).array() - degree * p.col(n - 1).array()) / (degree + 1.0);
  }
  return p;
}

}  // namespace tarn::runtime
