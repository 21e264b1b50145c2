#include "runtime/equation/hierarchy_indices.h"

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

using Occupation = std::vector<std::uint8_t>;

/// binomial(n, k) for n <= `most`, as a triangle.
class Binomials {
 public:
  explicit Binomials(std::size_t most) : size_(most + 1), values_(size_ * size_, 0) {
    for (std::size_t n = 0; n < size_; ++n) {
      values_[n * size_] = 1;
      for (std::size_t k = 1; k <= n; ++k)
        values_[n * size_ + k] = values_[(n - 1) * size_ + k - 1] + values_[(n - 1) * size_ + k];
    }
  }
  std::size_t operator()(std::size_t n, std::size_t k) const { return values_[n * size_ + k]; }

 private:
  std::size_t size_;
  std::vector<std::size_t> values_;
};

/// Numbers of occupations: those of smaller sum come first, then those with more in earlier modes.
class Numbering {
 public:
  Numbering(std::size_t modes, int depth) : modes_(modes), binomials_(modes + static_cast<std::size_t>(depth)) {}

  std::size_t operator()(const Occupation& n) const {
    std::size_t left = 0;
    for (const std::uint8_t value : n) left += value;
    std::size_t number = left == 0 ? 0 : binomials_(modes_ + left - 1, modes_);
    for (std::size_t m = 0; m + 1 < modes_; ++m) {
      left -= n[m];
      if (left == 0) break;
      number += binomials_(modes_ - m - 2 + left, modes_ - m - 1);
    }
    return number;
  }

 private:
  std::size_t modes_;
  Binomials binomials_;
};

/// The next one of the same sum in the order of Numbering; false after the last.
bool next_occupation(Occupation& n) {
  if (n.empty()) return false;
  const std::size_t last = n.size() - 1;
  std::size_t m = last;
  while (m > 0 && n[m - 1] == 0) --m;
  if (m == 0) return false;
  const std::uint8_t rest = n[last];
  n[last] = 0;
  --n[m - 1];
  n[m] = static_cast<std::uint8_t>(rest + 1);
  return true;
}

/// Rows of mode m: up from n at m (depth + 1) 2 + n, down from n depth + 1 later.
std::vector<HierarchyFactors> factors_of(const std::vector<HierarchyMode>& modes, int depth) {
  std::vector<HierarchyFactors> factors;
  for (const HierarchyMode& mode : modes) {
    for (int n = 0; n <= depth; ++n) factors.push_back({std::sqrt((n + 1) * mode.scale), 0});
    for (int n = 0; n <= depth; ++n) {
      const double root = std::sqrt(n / mode.scale) / 2;
      factors.push_back({root * (mode.coefficient + mode.conjugate), root * (mode.coefficient - mode.conjugate)});
    }
  }
  return factors;
}

void add_links(const std::vector<HierarchyMode>& modes, int depth, const Numbering& number, Occupation& n, int sum,
               HierarchyIndices& indices) {
  const auto rows = static_cast<std::uint32_t>(depth + 1);
  for (std::size_t c = 0; c < indices.couplings; ++c)
    for (const int step : {1, -1}) {
      for (std::size_t m = 0; m < modes.size(); ++m) {
        if (modes[m].coupling != c || (step > 0 ? sum == depth : n[m] == 0)) continue;
        const std::uint32_t row = (2 * static_cast<std::uint32_t>(m) + (step < 0)) * rows + n[m];
        n[m] = static_cast<std::uint8_t>(n[m] + step);
        indices.links.push_back({static_cast<std::uint32_t>(number(n)), row});
        n[m] = static_cast<std::uint8_t>(n[m] - step);
      }
      indices.ends.push_back(static_cast<std::uint32_t>(indices.links.size()));
    }
}

}  // namespace

std::vector<HierarchyMode> hierarchy_modes(std::span<const ExponentialSum> baths) {
  std::vector<HierarchyMode> modes;
  for (std::size_t c = 0; c < baths.size(); ++c)
    for (const Exponential& term : baths[c].terms) {
      const double scale = std::max(std::abs(term.coefficient), std::abs(term.conjugate));
      if (scale > 0) modes.push_back({c, term.coefficient, term.conjugate, term.rate, scale});
    }
  return modes;
}

double hierarchy_count(std::size_t modes, int depth) {
  double count = 1;
  for (int d = 1; d <= depth; ++d) count = count * (static_cast<double>(modes) + d) / d;
  return std::round(count);
}

HierarchyIndices hierarchy_indices(const std::vector<HierarchyMode>& modes, std::size_t couplings, int depth) {
  TARN_CHECK(depth >= 0 && depth < 255);
  TARN_CHECK(hierarchy_count(modes.size(), depth) * 2 * static_cast<double>(modes.size() + couplings) < 0x1p32);
  HierarchyIndices indices;
  indices.couplings = couplings;
  indices.factors = factors_of(modes, depth);
  indices.plain.assign(couplings, true);
  for (const HierarchyMode& mode : modes)
    if (mode.rate.imag() != 0 || mode.conjugate != std::conj(mode.coefficient)) indices.plain[mode.coupling] = false;
  const Numbering number(modes.size(), depth);
  for (int sum = 0; sum <= depth; ++sum) {
    Occupation n(modes.size(), 0);
    if (sum > 0 && modes.empty()) break;
    if (sum > 0) n[0] = static_cast<std::uint8_t>(sum);
    do {
      std::complex<double> decay = 0;
      for (std::size_t m = 0; m < modes.size(); ++m) decay += static_cast<double>(n[m]) * modes[m].rate;
      indices.decay.push_back(decay);
      add_links(modes, depth, number, n, sum, indices);
    } while (next_occupation(n));
  }
  indices.count = indices.decay.size();
  return indices;
}

}  // namespace tarn::runtime
