#pragma once
/// \file Which Bohr frequencies coincide: the jumps of a secular generator add up within a group.

#include <Eigen/Core>
#include <cstdint>
#include <vector>

namespace tarn::runtime {

/// A partition of the K x K pairs (n, m), stored as n + K m, by the frequency w = E_m - E_n that the
/// jump n <- m takes from the system. Pairs of group g: order[start[g]] .. order[start[g + 1]] - 1.
struct FrequencyGroups {
  std::vector<std::uint32_t> order;
  std::vector<std::uint32_t> start;

  std::size_t count() const { return start.size() - 1; }
};

/// Sorted frequencies chained with `tolerance` [rad/ns]: a group ends where the step exceeds it.
FrequencyGroups frequency_groups(const Eigen::VectorXd& energies, double tolerance);

/// Splits the groups whose members do not coincide for `energies` as well (same labels).
FrequencyGroups shared_groups(const FrequencyGroups& groups, const Eigen::VectorXd& energies, double tolerance);

/// True if only the pairs (n, n) share a group: populations then decouple from coherences.
bool is_simple(const FrequencyGroups& groups, Eigen::Index levels);

}  // namespace tarn::runtime
