#include "runtime/experiment/state_sets.h"

#include <algorithm>
#include <cmath>

#include "lang/support/match.h"
#include "lang/support/check.h"
#include "runtime/experiment/words.h"

namespace tarn::runtime {
namespace {

using Eigen::Index;

Result<SpannedSpace, RunError> ground_space(ChipLevels& levels, double s, double above) {
  const auto found = above > 0 ? levels.within(s, above) : levels.lowest(s, 1);
  if (!found) return Unexpected{found.error()};
  Index last = coinciding(**found, 0).second;
  const double limit = (*found)->energies[0] + above + kSameLevel * (*found)->width;
  while (above > 0 && last < (*found)->energies.size() && (*found)->energies[last] <= limit) {
    last = coinciding(**found, last).second;
  }
  return space_of(**found, 0, last);
}

}  // namespace

Result<Target, RunError> find_target(const Plan& plan, Functions& functions) {
  functions.set_input(plan.chip.offsets_slot, 0);
  const auto coefficients = coefficients_at(plan, functions, 1, 0);
  functions.set_input(plan.chip.offsets_slot, 1);
  if (!coefficients) return Unexpected{coefficients.error()};
  const std::vector<WordTerm> words = scaled_words(plan.chip.hamiltonian, *coefficients);
  const Eigen::VectorXd diagonal = diagonal_of(words, plan.chip.qubits.size());
  const double lowest = diagonal.minCoeff(), range = diagonal.maxCoeff() - lowest;
  if (!(range > 1e-14 * norm_bound(words))) {
    return Unexpected{RunError{"constant_target",
                               "`target` means nothing here: the diagonal of H at s = 1 is the same for all states"}};
  }
  Target target;
  std::vector<WordTerm> flipping;
  std::copy_if(words.begin(), words.end(), std::back_inserter(flipping), [](const WordTerm& term) { return term.word.x != 0; });
  target.diagonal = norm_bound(flipping) <= 1e-12 * range;  // A table may end within rounding of 0.
  for (Index i = 0; i < diagonal.size(); ++i) {
    if (diagonal[i] - lowest <= kSameLevel * range) target.states.push_back(static_cast<std::uint64_t>(i));
  }
  return target;
}

SpannedSpace space_of(const Levels& levels, Index first, Index last) {
  double gap = levels.width;
  if (first > 0) gap = std::min(gap, levels.energies[first] - levels.energies[first - 1]);
  if (last < levels.energies.size()) gap = std::min(gap, levels.energies[last] - levels.energies[last - 1]);
  const double error = levels.residual > 0 && gap > 0 ? std::min(1.0, levels.residual / gap) : 0;
  return {levels.vectors.middleCols(first, last - first), error};
}

Result<SpannedSpace, RunError> level_space(const StateSet& set, ChipLevels& levels, double s,
                                           std::span<const double> settings) {
  if (set.kind == StateSetKind::ground) {
    double above = 0;
    if (set.within) {
      const auto asked = finite_setting(*set.within, settings, "`within`");
      if (!asked) return Unexpected{asked.error()};
      above = *asked;
    }
    return ground_space(levels, s, above);
  }
  TARN_CHECK(set.kind == StateSetKind::level);
  const auto found = levels.lowest(s, Index{set.level} + 1);
  if (!found) return Unexpected{found.error()};
  if (Index{set.level} >= (*found)->energies.size()) {
    return Unexpected{RunError{"no_such_level", "the chip has no level " + std::to_string(set.level)}};
  }
  const auto [first, last] = coinciding(**found, set.level);
  return space_of(**found, first, last);
}

Subspace lettered_space(const std::string& letters) {
  if (letters.find_first_of("+-") != std::string::npos) return SpannedSpace{product_state(letters), 0};
  std::uint64_t index = 0;
  for (const char letter : letters) index = 2 * index + (letter == '1' ? 1 : 0);
  return BasisStates{{index}};
}

void add_basis_populations(const State& state, double weight, std::vector<double>& sums) {
  const Eigen::VectorXd populations =
      std::visit(Match{[](const Ket& psi) -> Eigen::VectorXd { return psi.cwiseAbs2(); },
                       [](const Density& rho) -> Eigen::VectorXd { return rho.diagonal().real(); }},
                 state);
  sums.resize(static_cast<std::size_t>(populations.size()), 0.0);
  for (std::size_t i = 0; i < sums.size(); ++i) sums[i] += weight * populations[static_cast<Index>(i)];
}

double population(const Subspace& space, const State& state) {
  const auto of_index = [&](std::uint64_t index) {
    const Index i = static_cast<Index>(index);
    return std::visit(Match{[&](const Ket& psi) { return std::norm(psi[i]); },
                            [&](const Density& rho) { return rho(i, i).real(); }},
                      state);
  };
  return std::visit(
      Match{[&](const Everything&) {
              return std::visit(Match{[](const Ket& psi) { return psi.squaredNorm(); },
                                      [](const Density& rho) { return rho.trace().real(); }},
                                state);
            },
            [&](const BasisStates& states) {
              double sum = 0;
              for (const std::uint64_t index : states.indices) sum += of_index(index);
              return sum;
            },
            [&](const SpannedSpace& spanned) {
              return std::visit(Match{[&](const Ket& psi) { return (spanned.vectors.adjoint() * psi).squaredNorm(); },
                                      [&](const Density& rho) {
                                        return (spanned.vectors.adjoint() * rho * spanned.vectors).trace().real();
                                      }},
                                state);
            }},
      space);
}

}  // namespace tarn::runtime
