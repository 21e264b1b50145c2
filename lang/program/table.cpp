#include "lang/program/table.h"

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"

namespace tarn {
namespace {

using Values = std::vector<double>;

Values differences(const Values& x, const Values& y) {
  Values secant(x.size() - 1);
  for (std::size_t j = 0; j < secant.size(); ++j) secant[j] = (y[j + 1] - y[j]) / (x[j + 1] - x[j]);
  return secant;
}

/// Slope at the first point from the parabola through three points, kept to the data's shape.
double end_slope(double near_width, double far_width, double near_secant, double far_secant) {
  const double slope = ((2 * near_width + far_width) * near_secant - near_width * far_secant) / (near_width + far_width);
  if (slope * near_secant <= 0) return 0;
  if (near_secant * far_secant <= 0 && std::abs(slope) > 3 * std::abs(near_secant)) return 3 * near_secant;
  return slope;
}

Values monotone_slopes(const Values& x, const Values& secant) {
  const std::size_t n = x.size();
  if (n == 2) return {secant[0], secant[0]};
  Values slope(n);
  for (std::size_t j = 1; j + 1 < n; ++j) {
    if (secant[j - 1] * secant[j] <= 0) continue;
    const double before = x[j] - x[j - 1];
    const double after = x[j + 1] - x[j];
    slope[j] = (after * secant[j - 1] + before * secant[j]) / (before + after);
  }
  slope[0] = end_slope(x[1] - x[0], x[2] - x[1], secant[0], secant[1]);
  slope[n - 1] = end_slope(x[n - 1] - x[n - 2], x[n - 2] - x[n - 3], secant[n - 2], secant[n - 3]);
  for (std::size_t j = 0; j + 1 < n; ++j) {
    if (secant[j] == 0) {
      slope[j] = slope[j + 1] = 0;
      continue;
    }
    const double length = std::hypot(slope[j] / secant[j], slope[j + 1] / secant[j]);
    if (length <= 3) continue;
    slope[j] *= 3 / length;
    slope[j + 1] *= 3 / length;
  }
  return slope;
}

/// Slopes of the not-a-knot spline: a tridiagonal system, eliminated row by row.
Values spline_slopes(const Values& x, const Values& secant) {
  const std::size_t n = x.size();
  if (n == 2) return {secant[0], secant[0]};
  Values width(n - 1);
  for (std::size_t j = 0; j + 1 < n; ++j) width[j] = x[j + 1] - x[j];
  if (n == 3) {
    const double bend = (secant[1] - secant[0]) / (width[0] + width[1]);
    return {secant[0] - bend * width[0], secant[0] + bend * width[0], secant[1] + bend * width[1]};
  }
  Values diagonal(n), upper(n), right(n), lower(n);
  const double first = width[0] + width[1];
  diagonal[0] = width[1];
  upper[0] = first;
  right[0] = ((width[0] + 2 * first) * width[1] * secant[0] + width[0] * width[0] * secant[1]) / first;
  for (std::size_t j = 1; j + 1 < n; ++j) {
    lower[j] = width[j];
    diagonal[j] = 2 * (width[j - 1] + width[j]);
    upper[j] = width[j - 1];
    right[j] = 3 * (width[j] * secant[j - 1] + width[j - 1] * secant[j]);
  }
  const double a = width[n - 2];
  const double b = width[n - 3];
  lower[n - 1] = a + b;
  diagonal[n - 1] = b;
  right[n - 1] = (a * a * secant[n - 3] + (2 * (a + b) + a) * b * secant[n - 2]) / (a + b);
  for (std::size_t j = 1; j < n; ++j) {
    const double factor = lower[j] / diagonal[j - 1];
    diagonal[j] -= factor * upper[j - 1];
    right[j] -= factor * right[j - 1];
  }
  Values slope(n);
  slope[n - 1] = right[n - 1] / diagonal[n - 1];
  for (std::size_t j = n - 1; j-- > 0;) slope[j] = (right[j] - upper[j] * slope[j + 1]) / diagonal[j];
  return slope;
}

PiecewiseCubic hermite(Values x, const Values& y, const Values& secant, const Values& slope) {
  PiecewiseCubic result;
  const std::size_t pieces = x.size() - 1;
  for (Values& c : result.c) c.resize(pieces);
  for (std::size_t j = 0; j < pieces; ++j) {
    const double h = x[j + 1] - x[j];
    result.c[0][j] = y[j];
    result.c[1][j] = slope[j];
    result.c[2][j] = (3 * secant[j] - 2 * slope[j] - slope[j + 1]) / h;
    result.c[3][j] = (slope[j] + slope[j + 1] - 2 * secant[j]) / (h * h);
  }
  result.knots = std::move(x);
  return result;
}

PiecewiseCubic straight(Values x, const Values& y) {
  PiecewiseCubic result;
  const Values secant = differences(x, y);
  for (Values& c : result.c) c.assign(secant.size(), 0);
  for (std::size_t j = 0; j < secant.size(); ++j) {
    result.c[0][j] = y[j];
    result.c[1][j] = secant[j];
  }
  result.knots = std::move(x);
  return result;
}

Values logarithms(Values values) {
  for (double& value : values) value = std::log(value);
  return values;
}

}  // namespace

PiecewiseCubic piecewise_cubic(const TableData& data) {
  TARN_CHECK(data.x.size() >= 2 && data.x.size() == data.y.size());
  switch (data.by) {
    case Interpolation::linear: return straight(data.x, data.y);
    case Interpolation::loglog: return straight(logarithms(data.x), logarithms(data.y));
    case Interpolation::monotone: {
      const Values secant = differences(data.x, data.y);
      return hermite(data.x, data.y, secant, monotone_slopes(data.x, secant));
    }
    case Interpolation::spline: {
      const Values secant = differences(data.x, data.y);
      return hermite(data.x, data.y, secant, spline_slopes(data.x, secant));
    }
  }
  return {};
}

double read_table(const TableData& data, const PiecewiseCubic& cubic, double x) {
  const bool outside = x < data.x.front() || x > data.x.back();
  if (outside && !data.hold_outside) return 0;
  const double held = std::clamp(x, data.x.front(), data.x.back());
  const bool logs = data.by == Interpolation::loglog;
  const double at = logs ? std::log(held) : held;
  const auto next = std::upper_bound(cubic.knots.begin(), cubic.knots.end(), at);
  const std::size_t last = cubic.knots.size() - 2;
  const auto before = static_cast<std::size_t>(std::max<std::ptrdiff_t>(next - cubic.knots.begin() - 1, 0));
  const std::size_t j = std::min(before, last);
  const double d = at - cubic.knots[j];
  const double value = cubic.c[0][j] + d * (cubic.c[1][j] + d * (cubic.c[2][j] + d * cubic.c[3][j]));
  return logs ? std::exp(value) : value;
}

}  // namespace tarn
