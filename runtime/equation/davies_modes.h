#pragma once
/// \file How levels relax and dephase under Davies' generator at one frame, and where that ends. Its map falls
/// into parts, of which one holds the populations.

#include <Eigen/Core>
#include <optional>

#include "runtime/equation/davies_table.h"
#include "runtime/generator/stationary.h"

namespace tarn::runtime {

/// What |1><1| - |0><0| does: T1 is the inverse of its rate. Empty where there is no complete set of modes.
std::optional<Mode> population_mode(const DaviesTable& table, const Eigen::VectorXd& energies);

/// What |j><k| does: T2.
std::optional<Mode> coherence_mode(const DaviesTable& table, const Eigen::VectorXd& energies, Eigen::Index j, Eigen::Index k);

/// The stationary state in the basis of the levels. Empty where there is none or more than one.
std::optional<Eigen::MatrixXcd> stationary_state(const DaviesTable& table, const Eigen::VectorXd& energies);

}  // namespace tarn::runtime
