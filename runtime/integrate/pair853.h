#pragma once
/// \file The explicit Runge-Kutta pair 8(5,3) as arrays; numbers and source in pair853.def.

#include <array>
#include <cstddef>

namespace tarn::runtime::pair853 {

/// Stages 0 to 11 make the step, 12 is the derivative at its end, 13 to 15 serve the interpolant.
inline constexpr std::size_t kStages = 16;
inline constexpr std::size_t kStepStages = 12;
inline constexpr std::size_t kInterpolantRows = 4;

struct Table {
  std::array<double, kStages> c{};                              ///< Nodes; c[0] = 0.
  std::array<std::array<double, kStages>, kStages> a{};         ///< Row 12 is the weights.
  std::array<double, kStages> b{};                              ///< Weights of the step, order 8.
  std::array<double, kStages> error3{}, error5{};               ///< Weights of the error estimates.
  std::array<std::array<double, kStages>, kInterpolantRows> dense{};
};

constexpr Table make_table() {
  Table t;
#define TARN_NODE(stage, value) t.c[stage] = value;
#define TARN_STAGE(stage, from, value) t.a[stage][from] = value;
#define TARN_WEIGHT(stage, value) t.b[stage] = t.a[12][stage] = value;
#define TARN_ERROR3(stage, value) t.error3[stage] = value;
#define TARN_ERROR5(stage, value) t.error5[stage] = value;
#define TARN_DENSE(row, stage, value) t.dense[row][stage] = value;
#include "runtime/integrate/pair853.def"
  return t;
}

inline constexpr Table kTable = make_table();

/// Weights b_i(x) of the interpolant of order 7: y(t + x h) = y + h sum_i b_i(x) k_i, 0 <= x <= 1.
constexpr std::array<double, kStages> interpolant_weights(double x) {
  std::array<double, kStages> result{};
  const double rest = 1 - x;
  for (std::size_t i = 0; i < kStages; ++i) {
    const double first = i == 0 ? 1 : 0, last = i == 12 ? 1 : 0, b = kTable.b[i];
    const auto& d = kTable.dense;
    const double tail = d[0][i] + x * (d[1][i] + rest * (d[2][i] + x * d[3][i]));
    result[i] = x * (b + rest * (first - b + x * (2 * b - last - first + rest * tail)));
  }
  return result;
}

}  // namespace tarn::runtime::pair853
