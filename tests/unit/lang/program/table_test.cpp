#include "lang/program/table.h"

#include <catch2/catch.hpp>

#include <cmath>

using namespace tarn;

namespace {

TableData data(std::vector<double> x, double (*f)(double), Interpolation by) {
  TableData result{"t", std::move(x), {}, by, true, {}};
  for (const double at : result.x) result.y.push_back(f(at));
  return result;
}

double read(const TableData& table, double x) { return read_table(table, piecewise_cubic(table), x); }

const std::vector<double> kUneven = {0, 0.1, 0.25, 0.3, 0.55, 0.8, 1};

}  // namespace

TEST_CASE("a not-a-knot spline reproduces cubics exactly") {  // textbook property, no source needed
  const auto cubic = [](double x) { return 2 - 3 * x + 5 * x * x - 4 * x * x * x; };
  for (const std::size_t n : {3u, 4u, 5u, 7u}) {
    const auto parabola = [](double x) { return 2 - 3 * x + 5 * x * x; };
    const std::vector<double> x(kUneven.begin(), kUneven.begin() + static_cast<std::ptrdiff_t>(n));
    const TableData table = n == 3 ? data(x, parabola, Interpolation::spline) : data(x, cubic, Interpolation::spline);
    for (double at = x.front(); at <= x.back(); at += 0.013) {
      CHECK(read(table, at) == Approx(n == 3 ? parabola(at) : cubic(at)).epsilon(1e-12));
    }
  }
}

TEST_CASE("a spline of a smooth function converges with the fourth power of the spacing") {  // textbook order
  const auto error = [](int n) {
    std::vector<double> x;
    for (int k = 0; k <= n; ++k) x.push_back(static_cast<double>(k) / n);
    const TableData table = data(x, [](double at) { return std::sin(3 * at); }, Interpolation::spline);
    const PiecewiseCubic cubic = piecewise_cubic(table);
    double worst = 0;
    for (double at = 0; at <= 1; at += 0.00137) worst = std::max(worst, std::abs(read_table(table, cubic, at) - std::sin(3 * at)));
    return worst;
  };
  CHECK(std::log2(error(64) / error(128)) == Approx(4).margin(0.3));
}

TEST_CASE("a monotone table keeps the shape of its data") {  // SIAM J. Numer. Anal. 17, 238 (1980)
  TableData step{"t", {0, 1, 2, 3, 4, 5}, {0, 0, 0.1, 0.9, 1, 1}, Interpolation::monotone, true, {}};
  const PiecewiseCubic cubic = piecewise_cubic(step);
  double before = 0;
  for (double at = 0; at <= 5; at += 0.003) {
    const double value = read_table(step, cubic, at);
    CHECK(value >= before - 1e-15);
    CHECK(value <= 1 + 1e-15);
    before = value;
  }
  for (std::size_t j = 0; j + 1 < cubic.c[0].size(); ++j) {
    const double h = cubic.knots[j + 1] - cubic.knots[j];
    const double slope = cubic.c[1][j] + h * (2 * cubic.c[2][j] + 3 * h * cubic.c[3][j]);
    CHECK(slope == Approx(cubic.c[1][j + 1]).margin(1e-13));
  }
}

TEST_CASE("linear tables are straight, log-log tables are power laws") {
  const TableData line = data(kUneven, [](double x) { return 3 - 2 * x; }, Interpolation::linear);
  CHECK(read(line, 0.4) == Approx(2.2).epsilon(1e-14));
  const TableData power = data({0.1, 0.7, 5, 40}, [](double x) { return 3 * std::pow(x, -0.9); }, Interpolation::loglog);
  for (const double at : {0.1, 0.2, 1.0, 17.0, 40.0}) CHECK(read(power, at) == Approx(3 * std::pow(at, -0.9)).epsilon(1e-13));
}

TEST_CASE("outside its points a table holds its end value or is zero") {
  TableData table = data(kUneven, [](double x) { return 1 + x; }, Interpolation::monotone);
  CHECK(read(table, -1) == 1);
  CHECK(read(table, 3) == Approx(2));
  table.hold_outside = false;
  CHECK(read(table, -1) == 0);
  CHECK(read(table, 3) == 0);
  CHECK(read(table, 1) == Approx(2));
}
