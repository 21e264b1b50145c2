#pragma once
/// \file Rational functions through samples, several functions with common poles: the greedy
/// barycentric fit. Source: SIAM J. Sci. Comput. 40, A1494 (2018).

#include <Eigen/Core>
#include <complex>
#include <vector>

namespace tarn::runtime {

/// Fits grow by one pole at a time; each degree costs a singular value decomposition.
class RationalFit {
 public:
  /// `x` ascending, n of them. Shape of `values` and `weights`: (n, functions). A weight is what an
  /// error at that sample counts.
  RationalFit(Eigen::ArrayXd x, Eigen::ArrayXXd values, Eigen::ArrayXXd weights);

  /// Takes one more support point, the sample with the largest weighted error. False if no sample
  /// is left that could serve; the fit is then as it was.
  bool grow();

  /// Poles: one fewer than support points. Real ones and conjugate pairs.
  std::vector<std::complex<double>> poles() const;

  /// The largest weighted error at a sample.
  double error() const { return error_; }

 private:
  void solve();

  Eigen::ArrayXd x_;
  Eigen::ArrayXXd values_;
  Eigen::ArrayXXd weights_;
  Eigen::ArrayXXd fitted_;
  std::vector<Eigen::Index> support_;  ///< Rows of x_.
  Eigen::VectorXd barycentric_;        ///< One for each support point.
  double error_ = 0.0;
};

}  // namespace tarn::runtime
