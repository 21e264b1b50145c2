#pragma once
/// \file What the tests of fast-noise equations share: baths as an equation takes them, and whole maps.

#include <memory>
#include <vector>

#include "runtime/bath/pair_function.h"
#include "runtime/bath/shift.h"
#include "runtime/equation/propagate_open.h"
#include "runtime/generator/noise_table.h"
#include "tests/physics/davies/models.h"

namespace tarn::runtime::testing {

/// Gamma(w) = gamma/2 + iS.
inline HalfRangeFunction half_range_of(const ThermalBath& bath) {
  const auto shift = std::make_shared<const ShiftFunction>(bath);
  const auto shared = std::make_shared<const ThermalBath>(bath);
  return [=](std::span<const double> w, std::complex<double>* out) {
    const auto n = static_cast<Eigen::Index>(w.size());
    const Eigen::Map<const Eigen::ArrayXd> at(w.data(), n);
    const Eigen::ArrayXd rate = shared->rate(at), s = (*shift)(at);
    for (Eigen::Index k = 0; k < n; ++k) out[k] = {0.5 * rate[k], s[k]};
  };
}

/// The bath as the equation takes it, for frequencies up to `width`.
inline FastBath fast_bath(FastEquation equation, const ThermalBath& bath, double width, double window = 0) {
  FastBath made;
  if (equation == FastEquation::redfield) made.half_range = half_range_of(bath);
  else made.pair = std::make_shared<const PairFunctions>(equation == FastEquation::universal ? root_pair(bath, width) : averaged_pair(bath, window, width));
  return made;
}

/// The chip's own operators.
inline LabOperators lab_of(const HamiltonianFamily& family) {
  LabOperators lab;
  lab.rows = family.rows;
  for (const auto& group : family.hamiltonian.groups) {
    lab.hamiltonian.rows.push_back(group.coefficient);
    lab.hamiltonian.matrices.push_back(dense_matrix<std::complex<double>>(group.terms, family.qubits));
  }
  lab.coefficients = [family](std::span<const double> s, std::span<const double>, double* out) { family.coefficients(s, out); };
  return lab;
}

/// d vec(rho)/dt at one s, N^2 x N^2.
inline Eigen::MatrixXcd map_of(const HamiltonianFamily& family, const std::shared_ptr<const NoiseTable>& table, double s) {
  const LabOperators lab = lab_of(family);
  OpenGenerator generator(table, lab);
  const double t = 0;
  generator.prepare({&s, 1}, {&t, 1});
  return generator.dense(0);
}

/// One qubit: H = -D/2 X - eps/2 Z, noise Z.
inline HamiltonianFamily standing_qubit(double d, double eps) { return ising(1, constant_schedules(d, -eps), {1.0}, {}); }

}  // namespace tarn::runtime::testing
