#include "runtime/trajectories/sample.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>

namespace tarn::runtime {
namespace {

double mean_of(std::span<const double> values) {
  return std::accumulate(values.begin(), values.end(), 0.0) / static_cast<double>(values.size());
}

}  // namespace

std::size_t sample_groups(std::size_t trajectories) { return std::min(trajectories, kMostSampleGroups); }

std::size_t sample_group(std::size_t trajectory, std::size_t trajectories) { return trajectory % sample_groups(trajectories); }

double jackknife_error(std::span<const double> without) {
  if (without.size() < 2) return std::numeric_limits<double>::infinity();
  const double mean = mean_of(without), count = static_cast<double>(without.size());
  double squares = 0;
  for (const double value : without) squares += (value - mean) * (value - mean);
  return std::sqrt(squares * (count - 1) / count);
}

double jackknife_bias(double all, std::span<const double> without) {
  if (without.size() < 2) return 0;
  return static_cast<double>(without.size() - 1) * (mean_of(without) - all);
}

}  // namespace tarn::runtime
