#pragma once
/// \file Which auxiliary matrices a hierarchy has and how they hang together.
///
/// Every exponential of every bath is a mode; an auxiliary matrix has an occupation n_m of each mode, and those
/// with sum n_m <= depth are kept. Number 0 is the density matrix. Rescaled by prod sqrt(n_m! scale_m^n_m), so that
/// their norms stay comparable: J. Chem. Phys. 130, 084105 (2009).

#include <complex>
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "runtime/bath/exponential_sum.h"

namespace tarn::runtime {

struct HierarchyMode {
  std::size_t coupling = 0;
  std::complex<double> coefficient, conjugate, rate;
  double scale = 0;  ///< max(|coefficient|, |conjugate|), > 0.
};

/// Coupling by coupling. Terms that are zero make no mode.
std::vector<HierarchyMode> hierarchy_modes(std::span<const ExponentialSum> baths);

/// How many matrices: binomial(modes + depth, depth). A double, since it may be anything.
double hierarchy_count(std::size_t modes, int depth);

/// From a matrix to one with an occupation more or less: its number, and the row of factors.
struct HierarchyLink {
  std::uint32_t to = 0, row = 0;
};

/// What a link multiplies with: up real, down both.
struct HierarchyFactors {
  std::complex<double> sum;         ///< Up: sqrt((n+1) scale). Down: sqrt(n/scale) (coefficient + conjugate)/2.
  std::complex<double> difference;  ///< Up: 0. Down: sqrt(n/scale) (coefficient - conjugate)/2.
};

struct HierarchyIndices {
  std::size_t count = 0, couplings = 0;
  std::vector<std::complex<double>> decay;  ///< sum n_m rate_m of each matrix [1/ns].
  /// Of matrix a and coupling c: those up end at ends[2 (a couplings + c)], those down at the next; each part begins
  /// where the one before ends.
  std::vector<std::uint32_t> ends;
  std::vector<HierarchyLink> links;
  std::vector<HierarchyFactors> factors;
  /// Of each coupling: all rates are real, so that `sum` is real and `difference` imaginary in every factor.
  std::vector<bool> plain;
};

/// Precondition: hierarchy_count * 2 * (modes + couplings) < 2^32.
HierarchyIndices hierarchy_indices(const std::vector<HierarchyMode>& modes, std::size_t couplings, int depth);

}  // namespace tarn::runtime
