/// \file Piecewise Legendre series and their transforms against elementary closed forms.

#include "runtime/bath/panel_series.h"

#include <catch2/catch.hpp>
#include <cmath>

using namespace tarn::runtime;

namespace {

BatchFunction each(double (*f)(double)) {
  return [f](std::span<const double> x, double* y) {
    for (std::size_t i = 0; i < x.size(); ++i) y[i] = f(x[i]);
  };
}

PanelSeries expand(double (*f)(double), std::vector<double> breaks) {
  return PanelSeries::expand(each(f), breaks, {1e-13, 1e-15});
}

}  // namespace

// Elementary: P int_0^2 y^2/(x - y) dy = -2 x - 2 + x^2 log|x/(x - 2)|.
TEST_CASE("the Cauchy transform of a parabola is exact, also on an edge between panels") {
  const PanelSeries series = expand([](double y) { return y * y; }, {0.0, 0.7, 2.0});
  for (const double x : {-50.0, -3.0, -1e-9, 1e-12, 0.3, 0.69999999999, 0.7, 0.70000001, 1.3, 1.99, 2.0001, 2.1, 2.5, 4.0, 1e3}) {
    CAPTURE(x);
    const double exact = -2 * x - 2 + x * x * std::log(std::abs(x / (x - 2)));
    // Far away the closed form itself cancels.
    CHECK(std::abs(series.cauchy(x) - exact) < 2e-13 * std::max(1.0, x * x));
  }
}

// Elementary: P int_0^inf exp(-y)/(x - y) dy = exp(-x) Ei(x); E1(1) = 0.2193839343955203 (DLMF 6.2).
TEST_CASE("the Cauchy transform of an exponential is an exponential integral") {
  const PanelSeries series = expand([](double y) { return std::exp(-y); }, {0.0, 1.0, 5.0, 40.0});
  CHECK(series.cauchy(-1.0) == Approx(-std::exp(1.0) * 0.2193839343955203).epsilon(1e-13));
  for (const double x : {0.01, 0.5, 1.0, 1.0000001, 4.999, 7.0, 30.0}) {
    CAPTURE(x);
    CHECK(series.cauchy(x) == Approx(std::exp(-x) * std::expint(x)).epsilon(2e-13).margin(1e-13));
  }
}

// Elementary: int_0^inf exp(-y) exp(-ity) dy = 1/(1 + it).
TEST_CASE("the Fourier transform keeps its absolute accuracy at any time") {
  const PanelSeries series = expand([](double y) { return std::exp(-y); }, {0.0, 1.0, 5.0, 40.0});
  for (const double t : {0.0, 1e-10, 0.1, 1.0, 3.3, 17.0, 23.0, 1e3, -2.0, 1e6}) {
    CAPTURE(t);
    const std::complex<double> exact = 1.0 / std::complex<double>(1.0, t);
    CHECK(std::abs(series.fourier(t) - exact) < 2e-13);
  }
  CHECK(series.integral() == Approx(1.0).epsilon(1e-14));
}

TEST_CASE("noise in the function ends the bisection, and the error tells of it") {
  const BatchFunction noisy = [](std::span<const double> x, double* y) {
    for (std::size_t i = 0; i < x.size(); ++i) y[i] = 1.0 + 1e-6 * std::sin(1e9 * x[i] * x[i]);
  };
  const std::vector<double> breaks = {0.0, 1.0};
  const PanelSeries series = PanelSeries::expand(noisy, breaks, {1e-12, 1e-12});
  CHECK(series.evaluations() < 40000);
  CHECK(series.error() > 1e-8);
  CHECK(series.integral() == Approx(1.0).epsilon(1e-6));
}

TEST_CASE("a singular end is bisected until it is negligible, and the error is told") {
  const PanelSeries root = expand([](double y) { return std::sqrt(y); }, {0.0, 1.0});
  CHECK(root.integral() == Approx(2.0 / 3).epsilon(1e-13));
  CHECK(root.value(0.25) == Approx(0.5).epsilon(1e-13));
  CHECK(root.value(1.5) == 0.0);
  CHECK(root.error() < 1e-9);
  const PanelSeries step = expand([](double y) { return y < 0.3 ? 0.0 : 1.0; }, {0.0, 1.0});
  CHECK(step.error() > 0.01);
  CHECK(step.integral_error() < 1e-12);
  CHECK(step.integral() == Approx(0.7).epsilon(1e-12));
}
