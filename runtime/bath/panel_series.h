#pragma once
/// \file A real function on an interval as Legendre series on adaptive panels, with the
/// transforms that then are exact: Cauchy (principal value) and Fourier.

#include <Eigen/Core>
#include <complex>
#include <cstddef>
#include <functional>
#include <span>
#include <vector>

namespace tarn::runtime {

/// f at many x at once: writes x.size() values.
using BatchFunction = std::function<void(std::span<const double> x, double* y)>;

/// What the expansion may leave out, per panel: the larger of the two.
struct PanelTolerance {
  double relative;  ///< Of the largest |f| on the panel.
  double absolute;  ///< In the unit of f.
};

class PanelSeries {
 public:
  /// Expands f on [breaks.front(), breaks.back()], with panel edges at all breaks (strictly
  /// ascending, 2 or more) and bisection where 20 Legendre terms do not reach the tolerance.
  /// f is evaluated inside panels only, never on an edge. A panel bisected 60 times, or
  /// narrower than 1e-13 of its distance from 0, or whose forebear between two breaks has
  /// come to 500 pieces (noise in f), is kept as it is: error() tells of it.
  static PanelSeries expand(const BatchFunction& f, std::span<const double> breaks, PanelTolerance tolerance);

  /// f(x); 0 outside. Cost: a binary search and at most 20 multiply-adds.
  double value(double x) const;

  /// P int dy f(y)/(x - y), any real x. If f jumps, the result has the logarithmic
  /// singularity it should have, cut off at a distance of rounding size.
  /// Legendre functions of the second kind: DLMF 14.3, 14.10 and Neumann's integral 14.12.
  double cauchy(double x) const;

  /// int dy f(y) exp(-i t y), any real t: spherical Bessel functions, DLMF 10.54.2.
  /// Absolute accuracy near 1e-13 int |f|, uniform in t.
  std::complex<double> fourier(double t) const;

  double integral() const;

  /// The same series, cut off above `x`.
  PanelSeries until(double x) const;

  /// Estimate of max |f - series|: the largest of the last three terms on the worst panel.
  /// For a panel that ends in a singularity of f it may be low by a factor of ten.
  double error() const { return error_; }
  /// Estimate of int |f - series|, which bounds the error of fourier().
  double integral_error() const { return integral_error_; }
  std::size_t evaluations() const { return evaluations_; }
  std::size_t panel_count() const { return panels_.size(); }
  /// Edges of the panels, ascending: panel_count() + 1 of them.
  std::vector<double> edges() const;

 private:
  struct Panel {
    double left;
    double right;
    std::size_t first;  ///< Row of its first coefficient.
    std::size_t count;
  };
  friend class PanelBuilder;

  std::vector<Panel> panels_;
  std::vector<double> coefficients_;
  double error_ = 0.0;
  double integral_error_ = 0.0;
  std::size_t evaluations_ = 0;
};

}  // namespace tarn::runtime
