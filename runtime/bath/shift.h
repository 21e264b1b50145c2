#pragma once
/// \file The Lamb-shift function S(w) of a bath, and a fast table of it.
/// S(w) = P int dv/(2 pi) gamma(v)/(w - v), in rad/ns; S(0) = -lambda at every temperature.

#include <Eigen/Core>
#include <functional>
#include <memory>
#include <vector>

#include "runtime/bath/panel_series.h"
#include "runtime/bath/thermal_bath.h"

namespace tarn::runtime {

/// A frequency where J or its slope jumps. S has the term step(|w|) b(w) log|w - v| at v = w
/// and v = -w of the kink, b(w) = 1/(1 - exp(-w/theta)), step as density_step().
struct DensityKink {
  double w;                                ///< [rad/ns], >= 0.
  std::shared_ptr<const Tabulated> table;  ///< Null where the step is not known.
  std::size_t row;                         ///< Of the table.
};

/// S(w) of a bath, one component at a time:
/// power law: half-range transform of C along arg t = pi/4 (Ohmic at theta = 0: Ei);
/// Drude, peaks: digamma functions of their poles; tables, functions: Legendre panels of J.
/// |error| below 1e-11 (lambda + gamma + |S|), for closed forms 1e-12, except within rounding of a jump of J,
/// where S itself is infinite. Cost 1 to 100 us a value; for many w use ShiftTable.
class ShiftFunction {
 public:
  explicit ShiftFunction(const ThermalBath& bath);

  /// Any real w [rad/ns]. Sub-Ohmic parts at theta > 0 jump to infinity at w = 0; the
  /// principal value -lambda is returned there. Shape: (n) in, (n) out, in rad/ns.
  Eigen::ArrayXd operator()(const Eigen::Ref<const Eigen::ArrayXd>& w) const;
  double at(double w) const;

  /// lambda [rad/ns], the scale of the error.
  double scale() const { return lambda_; }
  double theta() const { return theta_; }
  /// Where S is not smooth, w ascending; 0 is among them.
  const std::vector<DensityKink>& kinks() const { return kinks_; }

 private:
  std::vector<std::function<double(double)>> terms_;
  std::vector<DensityKink> kinks_;
  double theta_;
  double lambda_;
};

/// S on [-w_max, w_max] as piecewise polynomials, for some 1e5 values a step. Between two
/// rows of a tabulated J the logarithms of those two rows are kept apart, exactly.
class ShiftTable {
 public:
  /// w_max > 0 [rad/ns]; tolerance relative to the larger of lambda and the largest |S| on a
  /// polynomial's own panel (a narrow peak makes |S| large, and its rounding with it). Costs a few thousand values of S for
  /// smooth baths, about 50 more for each row of a table, 1000 for each break of a function.
  ShiftTable(ShiftFunction shift, double w_max, double tolerance = 1e-10);

  /// Some 100 ns a value inside [-w_max, w_max]; outside, S is computed afresh.
  /// Shape: (n) in, (n) out, in rad/ns.
  Eigen::ArrayXd operator()(const Eigen::Ref<const Eigen::ArrayXd>& w) const;

  /// The largest error found at three points of each panel, both ends among them, that the
  /// table was not made from [rad/ns]. It misses the tolerance only next to a point where S
  /// is infinite.
  double error() const { return error_; }
  /// Values of S that were computed to make the table.
  std::size_t evaluations() const { return evaluations_; }

 private:
  /// The logarithms kept apart at w.
  double singular_part(double w) const;
  /// Makes the series; returns what check() does.
  double build(double tolerance);
  /// Sets error_; returns the largest error relative to the scale of its panel.
  double check();

  ShiftFunction shift_;
  double w_max_;
  std::vector<double> edges_;  ///< -w_max, w_max and the kinks between, ascending.
  PanelSeries series_;         ///< S less its singular part.
  double error_ = 0.0;
  std::size_t evaluations_ = 0;
};

}  // namespace tarn::runtime
