#pragma once
/// \file What the tests of trajectories share: chips with noise, what trajectories say of them, and the density matrix.

#include <Eigen/Core>
#include <memory>
#include <vector>

#include "runtime/trajectories/trajectories.h"
#include "tests/physics/open/open_models.h"

namespace tarn::runtime::testing {

/// A chip under an equation, and where it goes.
struct NoisyRun {
  HamiltonianFamily family;
  Timeline timeline;
  std::vector<double> times;
  std::vector<Ket> kets;
  std::vector<double> weights = {1.0};
  std::vector<MatrixSum> jumps = {};  ///< As written; row 2 of the chips here is 1.
};

/// Ramp, hold, sudden step, ramp; 6 ns.
Timeline mixed_pace();

LabOperators lab_with_jumps(const NoisyRun& run);
std::shared_ptr<const NoiseTable> operators_table(const NoisyRun& run, FastEquation equation, double eta, double window = 0);
std::vector<BathFunctions> davies_baths(const NoisyRun& run, double eta);
Unravelling davies_unravelling(const NoisyRun& run, double eta, bool tabulated = false);

/// All Pauli words but the identity.
std::vector<Density> pauli_words(int qubits);

/// Means of the words for every trajectory: row i, columns word after word, time after time.
Eigen::MatrixXd readings_of(const Unravelling& model, const NoisyRun& run, std::size_t count, std::uint64_t seed,
                            std::size_t jobs = 1, double tolerance = 1e-8);
/// The same of density matrices, one for each time.
Eigen::RowVectorXd readings_of(const std::vector<Density>& states, int qubits);

std::vector<Density> density_by_open(const NoisyRun& run, std::shared_ptr<const NoiseTable> table);
std::vector<Density> density_by_davies(const NoisyRun& run, double eta);

/// (mean - expected)^T covariance^-1 (mean - expected) over the directions in which one trajectory has a variance above
/// 0.01, and their number: where few trajectories of a thousand differ at all, means are not normal. Else it is a
/// chi-square of that many degrees of freedom: Ann. Math. Stat. 2, 360 (1931).
struct ChiSquare {
  double value = 0;
  Eigen::Index freedom = 0;
};
ChiSquare chi_square(const Eigen::MatrixXd& readings, const Eigen::RowVectorXd& expected);

}  // namespace tarn::runtime::testing
