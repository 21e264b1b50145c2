#include "runtime/levels/groups.h"

#include <algorithm>
#include <numeric>

namespace tarn::runtime {
namespace {

/// Sorts order[first, last) by frequency and appends the start of each chain found.
void chain(FrequencyGroups& groups, std::uint32_t first, std::uint32_t last, const std::vector<double>& frequency, double tolerance) {
  const auto begin = groups.order.begin();
  std::sort(begin + first, begin + last, [&](std::uint32_t p, std::uint32_t q) {
    return frequency[p] != frequency[q] ? frequency[p] < frequency[q] : p < q;
  });
  for (std::uint32_t k = first; k < last; ++k)
    if (k == first || frequency[groups.order[k]] - frequency[groups.order[k - 1]] > tolerance) groups.start.push_back(k);
}

std::vector<double> frequencies(const Eigen::VectorXd& energies) {
  std::vector<double> frequency;
  frequency.reserve(static_cast<std::size_t>(energies.size() * energies.size()));
  for (Eigen::Index m = 0; m < energies.size(); ++m)
    for (Eigen::Index n = 0; n < energies.size(); ++n) frequency.push_back(energies[m] - energies[n]);
  return frequency;
}

}  // namespace

FrequencyGroups frequency_groups(const Eigen::VectorXd& energies, double tolerance) {
  const std::vector<double> frequency = frequencies(energies);
  FrequencyGroups groups;
  groups.order.resize(frequency.size());
  std::iota(groups.order.begin(), groups.order.end(), 0U);
  const auto size = static_cast<std::uint32_t>(frequency.size());
  chain(groups, 0, size, frequency, tolerance);
  groups.start.push_back(size);
  return groups;
}

FrequencyGroups shared_groups(const FrequencyGroups& groups, const Eigen::VectorXd& energies, double tolerance) {
  const std::vector<double> frequency = frequencies(energies);
  FrequencyGroups shared;
  shared.order = groups.order;
  for (std::size_t g = 0; g < groups.count(); ++g) chain(shared, groups.start[g], groups.start[g + 1], frequency, tolerance);
  shared.start.push_back(static_cast<std::uint32_t>(frequency.size()));
  return shared;
}

bool is_simple(const FrequencyGroups& groups, Eigen::Index levels) {
  return groups.count() == static_cast<std::size_t>(levels * levels - levels + 1);
}

}  // namespace tarn::runtime
