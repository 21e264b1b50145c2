#include "runtime/experiment/accuracy.h"

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

// Measured over 500 random chips (tests/unit/runtime/experiment/accuracy_test.cpp): the reported
// error covers the difference to a run 100 times tighter in at least 95 % of them.
constexpr double kOfDifference = 0.8;
constexpr double kOfDistance = 0.025;
constexpr double kRounding = 1e-15;
constexpr double kSmallStep = 1e-6;

std::vector<double> values_of(const Snapshot& snapshot) {
  std::vector<double> values;
  for (const Measured& measured : snapshot.readings) values.push_back(measured.value);
  return values;
}

/// How much the row moves if reading r moves by `by`.
double shift_of(const ObservableRows& rows, std::uint32_t row, std::vector<double>& readings, std::uint32_t r,
                double by) {
  const double before = rows(readings)[row], kept = readings[r];
  readings[r] = kept + by;
  const double after = rows(readings)[row];
  readings[r] = kept;
  return std::abs(after - before);
}

/// Root of the sum of squares of what a unit difference of the states does through each reading.
double sensitivity(const ObservableRows& rows, std::uint32_t row, std::span<const std::uint32_t> used,
                   std::span<const double> norms, std::vector<double>& readings) {
  double sum = 0;
  for (const std::uint32_t r : used) {
    if (!(norms[r] > 0)) continue;
    const double slope = shift_of(rows, row, readings, r, kSmallStep * norms[r]) / kSmallStep;
    sum += slope * slope;
  }
  return std::sqrt(sum);
}

/// What the errors of the readings themselves (of levels) do to the row.
double own_error(const Snapshot& snapshot, const ObservableRows& rows, std::uint32_t row,
                 std::span<const std::uint32_t> used, std::vector<double>& readings) {
  double sum = 0;
  for (const std::uint32_t r : used) {
    const double error = snapshot.readings[r].error;
    if (error > 0) sum += shift_of(rows, row, readings, r, error);
  }
  return sum;
}

}  // namespace

double state_distance(const Snapshot& coarse, const Snapshot& fine) {
  TARN_CHECK(coarse.probes.size() == fine.probes.size());
  if (fine.probes.empty()) return 0;
  double sum = 0;
  for (std::size_t p = 0; p < fine.probes.size(); ++p) {
    sum += (fine.probes[p] - coarse.probes[p]) * (fine.probes[p] - coarse.probes[p]);
  }
  return std::sqrt(sum / static_cast<double>(fine.probes.size()));
}

Answer estimate_answer(const Snapshot& coarse, const Snapshot& fine, const ObservableRows& rows, std::uint32_t row,
                       std::span<const std::uint32_t> used, std::span<const double> norms) {
  std::vector<double> readings = values_of(fine);
  const double value = rows(readings)[row];
  const double difference = std::abs(value - rows(values_of(coarse))[row]);
  const double floor = state_distance(coarse, fine) * sensitivity(rows, row, used, norms, readings);
  const double own = own_error(fine, rows, row, used, readings);
  const double rounding = used.empty() ? 0 : kRounding * std::abs(value);
  return {value, std::max(kOfDifference * difference, kOfDistance * floor) + own + rounding};
}

Answer estimate_probability(double coarse, double fine, double distance) {
  return {fine, std::max(kOfDifference * std::abs(fine - coarse), kOfDistance * distance) + kRounding * std::abs(fine)};
}

Answer answer_with_error(const Snapshot& run, double error, const ObservableRows& rows, std::uint32_t row,
                         std::span<const std::uint32_t> used, std::span<const double> norms) {
  std::vector<double> readings = values_of(run);
  const double value = rows(readings)[row];
  const double moved = error * sensitivity(rows, row, used, norms, readings);
  const double own = own_error(run, rows, row, used, readings);
  return {value, moved + own + (used.empty() ? 0 : kRounding * std::abs(value))};
}

Answer reduce_series(Over over, std::span<const Sample> series) {
  TARN_CHECK(!series.empty());
  if (over == Over::final) return series.back().answer;
  const double sign = over == Over::lowest ? 1 : -1;
  double value = INFINITY, low = INFINITY, high = INFINITY;
  for (const Sample& sample : series) {
    const double centre = sign * sample.answer.value;
    if (std::isnan(centre)) return {};
    value = std::min(value, centre);
    low = std::min(low, centre - sample.answer.error);
    high = std::min(high, centre + sample.answer.error);
  }
  return {sign * value, std::max(value - low, high - value)};
}

}  // namespace tarn::runtime
