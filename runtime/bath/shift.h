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

/// S(w) of a bath, one component at a time:
/// power law: half-range transform of C along arg t = pi/4 (Ohmic at theta = 0: Ei);
/// Drude, peaks: digamma functions of their poles; tables, functions: Legendre panels of J.
/// |error| below 1e-11 lambda (closed forms: 1e-12), except within rounding of a jump of J,
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
  /// |w| at which S is not smooth [rad/ns], ascending, 0 among them.
  const std::vector<double>& kinks() const { return kinks_; }

 private:
  std::vector<std::function<double(double)>> terms_;
  std::vector<double> kinks_;
  double lambda_;
};

/// S on [-w_max, w_max] as piecewise polynomials, for some 1e5 values a step.
class ShiftTable {
 public:
  /// w_max > 0 [rad/ns]; tolerance relative to lambda. Costs a few thousand values of S for
  /// smooth baths, a few hundred more for each kink of a table.
  ShiftTable(ShiftFunction shift, double w_max, double tolerance = 1e-10);

  /// Some 50 ns a value inside [-w_max, w_max]; outside, S is computed afresh.
  /// Shape: (n) in, (n) out, in rad/ns.
  Eigen::ArrayXd operator()(const Eigen::Ref<const Eigen::ArrayXd>& w) const;

  /// Estimate of the largest error on the table [rad/ns]: above tolerance * lambda only next
  /// to a point where S is infinite.
  double error() const { return series_.error(); }
  std::size_t evaluations() const { return series_.evaluations(); }

 private:
  ShiftFunction shift_;
  double w_max_;
  PanelSeries series_;
};

}  // namespace tarn::runtime
