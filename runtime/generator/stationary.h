#pragma once
/// \file What a generator does that stands still: its stationary state and its modes.
///
/// Generators come as dense maps on vec(rho), column after column, or on a part of it that they keep to itself.

#include <Eigen/Core>
#include <optional>

namespace tarn::runtime {

/// rho with L rho = 0 and trace 1, N x N, from the N^2 x N^2 map. Empty where there is none or more than one.
std::optional<Eigen::MatrixXcd> stationary_state(const Eigen::MatrixXcd& map);

/// How one matrix decays: the mode exp(-(rate - i frequency) t) that carries most of it.
struct Mode {
  double rate = 0;       ///< [1/ns]; 0: it does not decay.
  double frequency = 0;  ///< [rad/ns]
  double share = 0;      ///< Of the matrix, by the norms of what all modes carry.
};

/// Empty where the map has no complete set of modes.
std::optional<Mode> leading_mode(const Eigen::MatrixXcd& map, const Eigen::VectorXcd& x);

}  // namespace tarn::runtime
