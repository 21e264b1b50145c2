/// \file Shifts and correlation functions against plain quadrature of their definitions by
/// Boost.Math 1.74 (adaptive Gauss-Kronrod): the pole is subtracted, nothing is shared with
/// the panels or the closed forms but the rate gamma(w) or J.

#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/bath/correlation.h"
#include "runtime/bath/shift.h"
#include "runtime/bath/thermal_bath.h"

using namespace tarn::runtime;
using Eigen::ArrayXd;

namespace {

double integrate(const std::function<double(double)>& f, std::vector<double> edges) {
  double sum = 0.0;
  std::sort(edges.begin(), edges.end());
  for (std::size_t i = 0; i + 1 < edges.size(); ++i)
    if (edges[i + 1] > edges[i]) sum += boost::math::quadrature::gauss_kronrod<double, 31>::integrate(f, edges[i], edges[i + 1], 10, 1e-12);
  return sum;
}

/// P int_{-reach}^{reach} dv/(2 pi) gamma(v)/(w - v), the pole taken off in [w - 1, w + 1].
double shift_by_definition(const ThermalBath& bath, double w, double reach, std::vector<double> edges) {
  const auto rate = [&bath](double v) { return bath.rate(ArrayXd::Constant(1, v))[0]; };
  const double pole = rate(w);
  for (const double x : {-reach, reach, 0.0, w - 1.0, w, w + 1.0}) edges.push_back(x);
  const auto integrand = [&](double v) {
    const double near = std::abs(v - w) < 1.0 ? pole : 0.0;
    return (rate(v) - near) / (w - v) / (2 * M_PI);
  };
  return integrate(integrand, edges);
}

std::vector<double> mirrored(const std::vector<double>& w) {
  std::vector<double> all = w;
  for (const double x : w) all.push_back(-x);
  return all;
}

}  // namespace

TEST_CASE("S is the principal value of its definition") {
  const Tabulated table{{0.0, 3.0, 5.0, 9.0, 20.0}, {0.0, 0.3, 1.0, 0.2, 0.0}};
  const Tabulated logarithmic{{0.5, 2.0, 6.0, 30.0}, {1e-3, 0.3, 0.02, 1e-9}, Interpolation::log_log};
  struct Case {
    Component component;
    double reach;
    std::vector<double> edges;
  };
  const Case cases[] = {
      {PowerLaw{0.01, 5.0, 1.0}, 250.0, {-10.0, 10.0, 50.0}},
      {PowerLaw{0.01, 2.0, 2.5}, 150.0, {-10.0, 10.0, 30.0}},
      {table, 20.0, mirrored(table.w)},
      {logarithmic, 30.0, mirrored(logarithmic.w)},
  };
  for (const Case& one : cases)
    for (const double theta : {0.0, 0.4, 3.0}) {
      const auto bath = ThermalBath::make({one.component}, theta);
      REQUIRE(bath.has_value());
      const ShiftFunction shift(*bath);
      for (const double w : {-7.3, -2.2, 1.4, 4.1, 11.0}) {
        CAPTURE(one.component.index(), theta, w);
        CHECK(std::abs(shift.at(w) - shift_by_definition(*bath, w, one.reach, one.edges)) < 1e-10 * shift.scale());
      }
    }
}

TEST_CASE("C is the integral of its definition") {
  const Tabulated table{{0.0, 3.0, 5.0, 9.0, 20.0}, {0.0, 0.3, 1.0, 0.2, 0.0}};
  const Component components[] = {PowerLaw{0.01, 2.0, 1.0}, PowerLaw{0.01, 2.0, 0.5}, LorentzianPeak{0.3, 4.0, 0.7}, table};
  for (const Component& component : components)
    for (const double theta : {0.2, 3.0}) {
      const auto bath = ThermalBath::make({component}, theta);
      REQUIRE(bath.has_value());
      const CorrelationFunction c(*bath);
      const double size = std::abs(c.at(0.0));
      for (const double t : {0.0, 0.3, 2.0}) {
        // w = x^2 takes the root out of the sub-ohmic density; the tail of the peak beyond
        // 4e4 rad/ns is below 1e-10 of C(0).
        const auto part = [&](bool real) {
          return integrate([&](double x) {
            const double w = x * x;
            const double j = bath->density(ArrayXd::Constant(1, w))[0];
            return 2 * x * j * (real ? std::cos(w * t) / std::tanh(w / (2 * theta)) : -std::sin(w * t));
          }, {1e-12, 0.5, 1.0, std::sqrt(3.0), 2.0, std::sqrt(5.0), 3.0, std::sqrt(20.0), 5.0, 7.0, 10.0, 20.0, 50.0, 200.0});
        };
        CAPTURE(component.index(), theta, t);
        CHECK(std::abs(c.at(t).real() - part(true)) < 1e-9 * size);
        CHECK(std::abs(c.at(t).imag() - part(false)) < 1e-9 * size);
      }
    }
}
