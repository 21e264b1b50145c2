#include "compiler/driver/explain_levels.h"

#include <algorithm>
#include <cmath>

#include "runtime/experiment/chip_levels.h"
#include "runtime/experiment/functions.h"

namespace tarn::compiler {
namespace {

using runtime::ChipLevels;

constexpr std::size_t kDenseQubits = 8;  ///< Up to here a fine search for the smallest gap is cheap.
constexpr double kGolden = 0.6180339887498949;

LevelRow row_at(ChipLevels& levels, double s, std::string& failure) {
  LevelRow row{s};
  const auto found = levels.lowest(s, 1);
  if (!found) {
    failure = found.error().message;
    return row;
  }
  const runtime::Levels& all = **found;
  const auto [first, end] = runtime::coinciding(all, 0);
  row.ground = all.energies(0);
  row.degeneracy = static_cast<std::size_t>(end - first);
  row.width = all.width;
  if (end < all.energies.size()) row.gap = all.energies(end) - all.energies(0);
  return row;
}

/// Golden-section search between the neighbours of the smallest gap seen.
LevelRow refine(ChipLevels& levels, double low, double high, std::string& failure) {
  LevelRow a = row_at(levels, high - kGolden * (high - low), failure);
  LevelRow b = row_at(levels, low + kGolden * (high - low), failure);
  while (high - low > 1e-4 && failure.empty() && a.gap && b.gap) {
    if (*a.gap <= *b.gap) {
      high = b.s;
      b = a;
      a = row_at(levels, high - kGolden * (high - low), failure);
    } else {
      low = a.s;
      a = b;
      b = row_at(levels, low + kGolden * (high - low), failure);
    }
  }
  return a.gap && (!b.gap || *a.gap <= *b.gap) ? a : b;
}

}  // namespace

LevelSummary levels_along(const Prepared& prepared, std::size_t rows) {
  LevelSummary summary;
  const runtime::Functions functions(prepared.kernel, prepared.tables, prepared.plan);
  ChipLevels levels(prepared.plan, prepared.kernel, functions, [] { return false; });
  const std::size_t search = prepared.plan.chip.qubits.size() <= kDenseQubits ? 10 * (rows - 1) : rows - 1;
  std::vector<LevelRow> fine;
  for (std::size_t k = 0; k <= search && summary.failure.empty(); ++k) {
    fine.push_back(row_at(levels, static_cast<double>(k) / static_cast<double>(search), summary.failure));
  }
  if (!summary.failure.empty()) return summary;
  const std::size_t stride = search / (rows - 1);
  for (std::size_t k = 0; k <= search; k += stride) summary.rows.push_back(fine[k]);
  const auto by_gap = [](const LevelRow& a, const LevelRow& b) {
    return a.gap.value_or(HUGE_VAL) < b.gap.value_or(HUGE_VAL);
  };
  const auto least = std::min_element(fine.begin(), fine.end(), by_gap);
  if (!least->gap) return summary;
  const double step = 1.0 / static_cast<double>(search);
  summary.smallest = refine(levels, std::max(0.0, least->s - step), std::min(1.0, least->s + step), summary.failure);
  if (!summary.smallest->gap || *summary.smallest->gap > *least->gap) summary.smallest = *least;
  return summary;
}

std::optional<Spacing> smallest_spacing(const Prepared& prepared, std::size_t count, std::size_t rows) {
  const runtime::Functions functions(prepared.kernel, prepared.tables, prepared.plan);
  ChipLevels levels(prepared.plan, prepared.kernel, functions, [] { return false; });
  std::optional<Spacing> smallest;
  for (std::size_t k = 0; k < rows; ++k) {
    const double s = static_cast<double>(k) / static_cast<double>(rows - 1);
    const auto found = levels.lowest(s, static_cast<Eigen::Index>(count));
    if (!found) return std::nullopt;
    const auto& energies = (*found)->energies;
    const auto last = std::min<Eigen::Index>(static_cast<Eigen::Index>(count), energies.size());
    for (Eigen::Index j = 0; j + 1 < last; ++j) {
      if (runtime::coinciding(**found, j).second > j + 1) continue;
      const double distance = energies[j + 1] - energies[j];
      if (!smallest || distance < smallest->distance) smallest = Spacing{distance, s};
    }
  }
  return smallest;
}

}  // namespace tarn::compiler
