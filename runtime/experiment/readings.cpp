#include "runtime/experiment/readings.h"

#include <algorithm>
#include <cmath>
#include <limits>

#include "lang/support/match.h"
#include "lang/support/check.h"
#include "runtime/experiment/words.h"

namespace tarn::runtime {
namespace {

using Eigen::Index;

constexpr double kOneMode = 0.9;  ///< Share of one mode below which a time is marked.
constexpr double kOfProjector = 0.5;  ///< (1 + Z)/2: half of what a Pauli word moves by.

Eigen::MatrixXcd single(std::complex<double> value) { return Eigen::MatrixXcd::Constant(1, 1, value); }

double purity_of(const State& state) {
  return std::visit(Match{[](const Ket& psi) { return psi.squaredNorm() * psi.squaredNorm(); },
                          [](const Density& rho) { return rho.squaredNorm(); }},
                    state);
}

Eigen::MatrixXcd block_of(const Eigen::MatrixXcd& left, const Eigen::MatrixXcd& right, const State& state) {
  return std::visit(
      Match{[&](const Ket& psi) -> Eigen::MatrixXcd { return (left.adjoint() * psi) * (right.adjoint() * psi).adjoint(); },
            [&](const Density& rho) -> Eigen::MatrixXcd { return left.adjoint() * rho * right; }},
      state);
}

}  // namespace

bool reads_state(const Reading& reading) {
  return !std::holds_alternative<ReadLevel>(reading) && !std::holds_alternative<ReadGap>(reading) &&
         !std::holds_alternative<ReadReduction>(reading) && !std::holds_alternative<ReadRelaxation>(reading) &&
         !std::holds_alternative<ReadDephasing>(reading) && !std::holds_alternative<ReadVerdict>(reading);
}

bool reads_target(const Reading& reading) {
  const ReadPopulation* read = std::get_if<ReadPopulation>(&reading);
  return read != nullptr && read->set.kind == StateSetKind::target;
}

std::vector<WordTerm> probe_words(std::size_t qubits) {
  const std::uint64_t mask = (std::uint64_t{1} << qubits) - 1;
  std::vector<WordTerm> words;
  std::uint64_t state = 0;
  // Counter and multiplier of a 64-bit mixing generator: any fixed spread of words will do.
  for (int i = 0; i < 1000 && words.size() < kProbes; ++i) {
    state += 0x9e3779b97f4a7c15u;
    const std::uint64_t mixed = (state ^ (state >> 29)) * 0xbf58476d1ce4e5b9u;
    const PauliWord word{(mixed >> 7) & mask, (mixed >> 37) & mask};
    if (word == PauliWord{}) continue;
    const bool known = std::any_of(words.begin(), words.end(), [&](const WordTerm& w) { return w.word == word; });
    if (!known) words.push_back({1, word});
  }
  return words;
}

/// Prepares one reading after the other.
struct InstantReadings::Preparer {
  const Plan& plan;
  Instant at;
  ChipLevels& levels;
  std::span<const double> settings;
  const Target* target;
  std::span<const double> coefficients;  ///< Of all operators at the instant.
  const ModeAt& mode;
  const VerdictAt& verdict;
  Prepared& prepared;                    ///< To be filled.
  double& norm;
  std::vector<std::string>& reasons;  ///< Why values are lacking.

  using Outcome = Result<Done, RunError>;

  template <class T>
  Outcome done(T value, double its_norm) const {
    prepared = std::move(value);
    norm = its_norm;
    return Done{};
  }

  Outcome operator()(const ReadPopulation& read) const {
    switch (read.set.kind) {
      case StateSetKind::any: return done(OfSpace{Everything{}, 0}, kOfProjector);
      case StateSetKind::state: return done(OfSpace{lettered_space(read.set.letters), 0}, kOfProjector);
      case StateSetKind::target:
        TARN_CHECK(target != nullptr);
        return done(OfSpace{BasisStates{target->states}, 0}, kOfProjector);
      case StateSetKind::ground:
      case StateSetKind::level: break;
    }
    auto space = level_space(read.set, levels, at.s, settings);
    if (!space) return Unexpected{space.error()};
    const double error = space->error;
    return done(OfSpace{std::move(space).value(), error}, kOfProjector);
  }
  Outcome operator()(const ReadMean& read) const { return of_words(scaled_words(read.op, coefficients)); }
  Outcome operator()(const ReadMeanEnergy&) const {
    return of_words(scaled_words(plan.chip.hamiltonian, coefficients));
  }
  Outcome of_words(std::vector<WordTerm> words) const {
    const double bound = norm_bound(words);
    if (!std::isfinite(bound)) {
      return Unexpected{RunError{"not_finite", "a coefficient of an observed operator is not finite"}};
    }
    return done(OfOperator{std::move(words)}, bound);
  }
  Outcome operator()(const ReadLevel& read) const {
    const auto found = levels.lowest(at.s, Index{read.level} + 1);
    if (!found) return Unexpected{found.error()};
    if (Index{read.level} >= (*found)->energies.size()) return Unexpected{no_level(read.level)};
    return done(OfLevels{{(*found)->energies[read.level], (*found)->residual}}, 0);
  }
  Outcome operator()(const ReadGap&) const {
    const auto found = levels.lowest(at.s, 1);
    if (!found) return Unexpected{found.error()};
    const Index above = coinciding(**found, 0).second;
    if (above >= (*found)->energies.size()) return lacking("all levels coincide, so that there is no gap");
    return done(OfLevels{{(*found)->energies[above] - (*found)->energies[0], 2 * (*found)->residual}}, 0);
  }
  Outcome operator()(const ReadPurity&) const { return done(OfPurity{}, 1); }
  Outcome operator()(const ReadCoherence& read) const;
  Outcome operator()(const ReadFidelity& read) const {
    return done(OfSpace{lettered_space(read.letters), 0}, kOfProjector);
  }
  Outcome operator()(const ReadReduction&) const { return done(None{}, 0); }
  Outcome operator()(const ReadRelaxation&) const { return time_of("T1", std::nullopt); }
  Outcome operator()(const ReadDephasing& read) const { return time_of("T2", LevelPair{read.row, read.column}); }
  Outcome time_of(const std::string& name, std::optional<LevelPair> pair) const {
    if (!mode) return Unexpected{RunError{"no_modes", "this equation has no generator that stands still, so that `" + name + "` has no value"}};
    const auto found = mode(at.s, pair);
    if (!found) return Unexpected{found.error()};
    if (!(found->rate > 0)) return lacking("nothing decays that `" + name + "` could be read off");
    if (found->share < kOneMode) reasons.push_back("`" + name + "` is marked: several modes share what decays, and the one it is of carries less than 90 %");
    return done(OfLevels{{1 / found->rate, 0}}, 0);
  }
  Outcome operator()(const ReadVerdict&) const {
    const auto found = verdict(at);
    if (!found) return Unexpected{found.error()};
    return done(OfLevels{{*found, 0}}, 0);
  }

  /// The reading has no value at this instant; others may.
  Outcome lacking(const std::string& why) const {
    reasons.push_back(why);
    return done(OfLevels{{std::numeric_limits<double>::quiet_NaN(), 0}}, 0);
  }

  static RunError no_level(std::uint32_t level) {
    return {"no_such_level", "the chip has no level " + std::to_string(level)};
  }
};

InstantReadings::Preparer::Outcome InstantReadings::Preparer::operator()(const ReadCoherence& read) const {
  const auto found = levels.lowest(at.s, Index{std::max(read.row, read.column)} + 1);
  if (!found) return Unexpected{found.error()};
  for (const std::uint32_t level : {read.row, read.column}) {
    if (Index{level} >= (*found)->energies.size()) return Unexpected{no_level(level)};
  }
  const auto [row_first, row_last] = coinciding(**found, read.row);
  const auto [column_first, column_last] = coinciding(**found, read.column);
  if (row_first == column_first && read.row != read.column) {
    return lacking("levels " + std::to_string(read.row) + " and " + std::to_string(read.column) +
                   " coincide, so that their coherence has no value");
  }
  SpannedSpace left = space_of(**found, row_first, row_last), right = space_of(**found, column_first, column_last);
  const double error = left.error + right.error;
  return done(OfCoherence{std::move(left.vectors), std::move(right.vectors), error}, kOfProjector);
}

Result<InstantReadings, RunError> InstantReadings::make(const Plan& plan, std::span<const std::uint32_t> rows,
                                                        Instant at, const Functions& functions, ChipLevels& levels,
                                                        std::span<const double> settings, const Target* target,
                                                        const ModeAt& mode, const VerdictAt& verdict) {
  const std::vector<double> coefficients = functions.values(kCoefficients, at.s, at.t);
  InstantReadings readings;
  readings.prepared_.resize(plan.readings.size());
  readings.norms_.assign(plan.readings.size(), 0.0);
  for (const std::uint32_t row : rows) {
    const Preparer prepare{plan, at, levels, settings, target, coefficients, mode, verdict, readings.prepared_[row],
                           readings.norms_[row], readings.lacking_};
    const auto done = std::visit(prepare, plan.readings[row]);
    if (!done) return Unexpected{done.error()};
  }
  readings.probes_ = probe_words(plan.chip.qubits.size());
  return readings;
}

ReadingSums InstantReadings::empty_sums() const {
  ReadingSums sums;
  for (const Prepared& prepared : prepared_) {
    const OfCoherence* coherence = std::get_if<OfCoherence>(&prepared);
    sums.linear.push_back(coherence ? Eigen::MatrixXcd::Zero(coherence->left.cols(), coherence->right.cols())
                                    : single(0));
  }
  sums.probes.assign(probes_.size(), 0.0);
  return sums;
}

void InstantReadings::add(const State& state, double weight, ReadingSums& sums) const {
  for (std::size_t r = 0; r < prepared_.size(); ++r) {
    Eigen::MatrixXcd& sum = sums.linear[r];
    std::visit(Match{[](const None&) {}, [](const OfLevels&) {},
                     [&](const OfSpace& of) { sum(0, 0) += weight * population(of.space, state); },
                     [&](const OfOperator& of) { sum(0, 0) += weight * mean_of(of.words, state); },
                     [&](const OfPurity&) { sum(0, 0) += weight * weight * purity_of(state); },
                     [&](const OfCoherence& of) { sum += weight * block_of(of.left, of.right, state); }},
               prepared_[r]);
  }
  for (std::size_t p = 0; p < probes_.size(); ++p) sums.probes[p] += weight * mean_of({probes_[p]}, state).real();
}

std::vector<Measured> InstantReadings::finish(const ReadingSums& sums) const {
  std::vector<Measured> measured(prepared_.size());
  for (std::size_t r = 0; r < prepared_.size(); ++r) {
    const Eigen::MatrixXcd& sum = sums.linear[r];
    measured[r] = std::visit(
        Match{[](const None&) { return Measured{}; }, [](const OfLevels& of) { return of.measured; },
              [&](const OfSpace& of) { return Measured{sum(0, 0).real(), of.error}; },
              [&](const OfOperator&) { return Measured{sum(0, 0).real(), 0}; },
              [&](const OfPurity&) { return Measured{sum(0, 0).real(), 0}; },
              [&](const OfCoherence& of) { return Measured{sum.norm(), of.error}; }},
        prepared_[r]);
  }
  return measured;
}

}  // namespace tarn::runtime
