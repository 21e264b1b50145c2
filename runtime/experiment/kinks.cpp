#include "runtime/experiment/kinks.h"

#include <algorithm>
#include <cmath>

#include "runtime/experiment/pace.h"

namespace tarn::runtime {
namespace {

constexpr std::size_t kSamples = 1025;

/// On which side of a level a value lies; a NaN is on a side of its own.
int side(double value, double level) {
  if (std::isnan(value)) return 2;
  return value > level ? 1 : value < level ? -1 : 0;
}

/// The s between a and b where the side changes from that at a.
double bisect(const Functions& functions, std::uint32_t row, double level, double a, double b, int side_a) {
  for (int i = 0; i < 60 && b - a > 1e-16; ++i) {
    const double middle = 0.5 * (a + b);
    if (middle <= a || middle >= b) break;
    const bool left = side(functions.values(kKinks, middle, 0)[row], level) == side_a;
    (left ? a : b) = middle;
  }
  return 0.5 * (a + b);
}

}  // namespace

std::vector<double> kink_positions(const std::vector<Kink>& kinks, const Functions& functions) {
  if (kinks.empty()) return {};
  std::vector<double> s(kSamples), positions;
  for (std::size_t i = 0; i < kSamples; ++i) s[i] = static_cast<double>(i) / (kSamples - 1);
  const std::vector<double> values = functions.along(kKinks, s);
  for (const Kink& kink : kinks) {
    const double* row = &values[kink.row * kSamples];
    for (const double level : kink.levels) {
      for (std::size_t i = 0; i + 1 < kSamples; ++i) {
        const int before = side(row[i], level);
        if (before == side(row[i + 1], level)) continue;
        positions.push_back(bisect(functions, kink.row, level, s[i], s[i + 1], before));
      }
    }
  }
  std::sort(positions.begin(), positions.end());
  const auto same = [](double a, double b) { return b - a < kSameS; };
  positions.erase(std::unique(positions.begin(), positions.end(), same), positions.end());
  return positions;
}

std::vector<std::size_t> held_offsets(const Chip& chip, const Timeline& timeline, std::span<const double> settings) {
  const RangeOfS range = range_of_s(timeline);
  std::vector<std::size_t> held;
  for (std::size_t q = 0; q < chip.qubits.size(); ++q) {
    if (!chip.qubits[q].offset) continue;
    const double offset = settings[chip.qubits[q].offset->row];
    if (range.lowest + offset < -kSameS || range.highest + offset > 1 + kSameS) held.push_back(q);
  }
  return held;
}

}  // namespace tarn::runtime
