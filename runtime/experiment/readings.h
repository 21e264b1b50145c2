#pragma once
/// \file What is measured on a state, or on the levels, at one instant of one grid point.
///
/// Most readings are linear in the density matrix: they are summed over the kets of a mixture and
/// finished once. Beside the plan's readings the means of a few Pauli words are taken (probes): they
/// tell how far apart two propagations are, whatever the observables.

#include <span>
#include <vector>

#include "runtime/experiment/generator_at.h"
#include "runtime/experiment/pace.h"
#include "runtime/experiment/state_sets.h"

namespace tarn::runtime {

inline constexpr std::size_t kProbes = 12;

/// A reading's value and the error its levels bring (not that of the propagation).
struct Measured {
  double value = 0;
  double error = 0;
};

/// Sums of one attempt at one instant.
struct ReadingSums {
  std::vector<Eigen::MatrixXcd> linear;  ///< One matrix a reading, 1 x 1 mostly.
  std::vector<double> probes;
};

/// How |1><1| - |0><0|, or |row><column| of a pair, decays under the equation standing still at s. Empty where the
/// equation has no such generator.
using ModeAt = std::function<Result<Mode, RunError>(double s, std::optional<LevelPair> pair)>;

/// The worst verdict on the equation up to an instant: 0 within, 1 marginal, 2 outside.
using VerdictAt = std::function<Result<double, RunError>(Instant at)>;

class InstantReadings {
 public:
  /// Prepares readings `rows` of the plan at `at`; others and reductions stay 0.
  /// `target` is set if a reading needs it.
  static Result<InstantReadings, RunError> make(const Plan& plan, std::span<const std::uint32_t> rows, Instant at,
                                                const Functions& functions, ChipLevels& levels,
                                                std::span<const double> settings, const Target* target,
                                                const ModeAt& mode, const VerdictAt& verdict);

  ReadingSums empty_sums() const;
  /// Adds a state with its weight. The kets of a mixture are orthonormal and evolve unitarily.
  void add(const State& state, double weight, ReadingSums& sums) const;
  /// One number for every reading of the plan.
  std::vector<Measured> finish(const ReadingSums& sums) const;
  /// What two states can differ by in each reading, roughly, where they differ by 1 in the mean of a Pauli
  /// word: the norm of its operator without the identity; 0 for readings of levels only.
  const std::vector<double>& norms() const { return norms_; }
  /// Why readings have no value (NaN) at this instant; the same words at every instant.
  const std::vector<std::string>& lacking() const { return lacking_; }

 private:
  struct None {};
  struct OfSpace { Subspace space; double error; };
  struct OfOperator { std::vector<WordTerm> words; };
  struct OfLevels { Measured measured; };
  struct OfPurity {};
  struct OfCoherence { Eigen::MatrixXcd left, right; double error; };
  using Prepared = std::variant<None, OfSpace, OfOperator, OfLevels, OfPurity, OfCoherence>;
  struct Preparer;

  std::vector<Prepared> prepared_;
  std::vector<double> norms_;
  std::vector<std::string> lacking_;
  std::vector<WordTerm> probes_;
};

/// kProbes Pauli words on `qubits` qubits, other than the identity, the same each time; fewer
/// where there are fewer words.
std::vector<WordTerm> probe_words(std::size_t qubits);

/// Rows of readings that need a state; the others are of levels, or reductions.
bool reads_state(const Reading& reading);
/// True if the reading needs the target states.
bool reads_target(const Reading& reading);

}  // namespace tarn::runtime
