#include "runtime/experiment/accuracy.h"

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

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

Answer estimate_answer(const Snapshot& best, std::span<const Comparison> others, double shared,
                       const ObservableRows& rows, std::uint32_t row, std::span<const std::uint32_t> used,
                       std::span<const double> norms) {
  std::vector<double> readings = values_of(best);
  const double value = rows(readings)[row];
  const double sensitive = others.empty() && shared == 0 ? 0 : sensitivity(rows, row, used, norms, readings);
  double error = 0;
  for (const Comparison& other : others) {
    const double difference = std::abs(value - rows(values_of(other.run))[row]);
    const double floor = state_distance(other.run, best) * sensitive;
    error = std::max({error, other.weights.of_difference * difference, other.weights.of_distance * floor});
  }
  const double own = own_error(best, rows, row, used, readings);
  const double rounding = used.empty() ? 0 : kRounding * std::abs(value);
  return {value, error + shared * sensitive + own + rounding};
}

Answer estimate_probability(const Snapshot& best, std::span<const Comparison> others, double shared, std::size_t b) {
  const double value = best.distribution[b];
  double error = 0;
  for (const Comparison& other : others) {
    const double difference = std::abs(value - other.run.distribution[b]);
    error = std::max({error, other.weights.of_difference * difference, other.weights.of_distance * state_distance(other.run, best)});
  }
  return {value, error + shared + kRounding * std::abs(value)};
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
