#pragma once
/// \file The part of an unravelling that the chip's own operators make, whatever its baths.

#include <cmath>
#include <complex>
#include <optional>

#include "runtime/generator/open_generator.h"

namespace tarn::runtime {

/// Coefficients of one instant; empty where one that is used is not finite.
inline std::optional<std::vector<double>> lab_coefficients(const LabOperators& lab, double s, double t) {
  std::vector<double> values(lab.rows);
  lab.coefficients({&s, 1}, {&t, 1}, values.data());
  const auto finite = [&](const MatrixSum& sum) {
    for (const std::uint32_t row : sum.rows)
      if (!std::isfinite(values[row])) return false;
    return true;
  };
  if (!finite(lab.hamiltonian)) return std::nullopt;
  for (const MatrixSum& jump : lab.jumps)
    if (!finite(jump)) return std::nullopt;
  return values;
}

inline Eigen::MatrixXcd lab_matrix(const MatrixSum& sum, const std::vector<double>& coefficients, Eigen::Index dimension) {
  Eigen::MatrixXcd total = Eigen::MatrixXcd::Zero(dimension, dimension);
  for (std::size_t g = 0; g < sum.rows.size(); ++g) total += coefficients[sum.rows[g]] * sum.matrices[g];
  return total;
}

/// drift += -iH - sum_j L_j^dagger L_j / 2.
inline void add_lab_drift(const LabOperators& lab, const std::vector<double>& coefficients, Eigen::MatrixXcd& drift) {
  const MatrixSum& h = lab.hamiltonian;
  for (std::size_t g = 0; g < h.rows.size(); ++g)
    drift += std::complex<double>(0, -coefficients[h.rows[g]]) * h.matrices[g];
  for (const MatrixSum& jump : lab.jumps) {
    const Eigen::MatrixXcd op = lab_matrix(jump, coefficients, drift.rows());
    drift.noalias() -= 0.5 * op.adjoint() * op;
  }
}

}  // namespace tarn::runtime
