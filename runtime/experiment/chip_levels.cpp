#include "runtime/experiment/chip_levels.h"

#include <fmt/format.h>

#include <cmath>
#include <cstring>
#include <set>

#include "lang/support/check.h"
#include "runtime/experiment/words.h"
#include "runtime/integrate/vectors.h"

namespace tarn::runtime {
namespace {

using Eigen::Index;

constexpr Index kAlwaysDense = 256;
constexpr Index kMostDense = 2048;
constexpr Index kMostLevels = 4096;

RunError too_many(Index dimension) {
  return {"too_many_levels",
          fmt::format("more of the chip's {} levels are needed than can be computed", dimension)};
}

std::set<std::uint32_t> coefficient_rows(const OperatorSum& sum) {
  std::set<std::uint32_t> rows;
  for (const OperatorGroup& group : sum.groups) rows.insert(group.coefficient);
  return rows;
}

}  // namespace

Result<std::vector<double>, RunError> coefficients_at(const Plan& plan, const Functions& functions, double s,
                                                      double t) {
  std::vector<double> values = functions.values(kCoefficients, s, t);
  for (const OperatorSum* sum : {&plan.chip.hamiltonian, &plan.chip.drive}) {
    for (const std::uint32_t row : coefficient_rows(*sum)) {
      if (std::isfinite(values[row])) continue;
      return Unexpected{
          RunError{"not_finite", fmt::format("a coefficient of the Hamiltonian is not finite at s = {:.6g}", s)}};
    }
  }
  return values;
}

ChipLevels::ChipLevels(const Plan& plan, const Kernel& kernel, const Functions& functions, Interrupted interrupted)
    : plan_(plan), kernel_(kernel), functions_(functions), interrupted_(std::move(interrupted)),
      dimension_(Index{1} << plan.chip.qubits.size()), real_(has_real_matrix(plan.chip.hamiltonian)) {}

HermitianProduct ChipLevels::product(const std::vector<double>& coefficients) {
  if (prepared_.size() == 0) {
    prepared_ = AlignedArray(kernel_.prepared_doubles(kHamiltonian) + 1);
    TARN_CHECK(kernel_.prepare(kHamiltonian)(prepared_.data()) == TARN_OK);
  }
  // The generator holds the terms in t as well: without their coefficients it is H of levels.
  auto without_drive = std::make_shared<AlignedArray>(coefficients.size());
  std::memcpy(without_drive->data(), coefficients.data(), coefficients.size() * sizeof(double));
  for (const std::uint32_t row : coefficient_rows(plan_.chip.drive)) without_drive->data()[row] = 0;
  const std::size_t doubles = 2 * static_cast<std::size_t>(dimension_);
  auto in = std::make_shared<AlignedArray>(doubles), out = std::make_shared<AlignedArray>(doubles);
  return [=, this](const std::complex<double>* x, std::complex<double>* y) {
    std::memcpy(in->data(), x, doubles * sizeof(double));
    kernel_.apply(kHamiltonian)(without_drive->data(), prepared_.data(), in->data(), out->data());
    std::memcpy(static_cast<void*>(y), out->data(), doubles * sizeof(double));
  };
}

Result<Levels, RunError> ChipLevels::solve_fresh(double s, Index count) {
  const bool dense = dimension_ <= kAlwaysDense || 8 * count > dimension_;
  if (dense ? dimension_ > kMostDense : count > kMostLevels) return Unexpected{too_many(dimension_)};
  const auto coefficients = coefficients_at(plan_, functions_, s, 0);
  if (!coefficients) return Unexpected{coefficients.error()};
  ++decompositions_;
  if (dense) {
    return all_levels(dense_operator(scaled_words(plan_.chip.hamiltonian, *coefficients), plan_.chip.qubits.size()));
  }
  const Eigen::MatrixXcd start = levels_.vectors;
  return lowest_levels(dimension_, count, product(*coefficients), real_, start, interrupted_);
}

Result<Done, RunError> ChipLevels::solve(double s, Index count) {
  if (solved_ == s && (levels_.complete || levels_.energies.size() >= count)) return Done{};
  auto fresh = solve_fresh(s, count);
  if (!fresh) return Unexpected{fresh.error()};
  levels_ = std::move(fresh).value();
  solved_ = s;
  return Done{};
}

Result<const Levels*, RunError> ChipLevels::lowest(double s, Index count) {
  count = std::min(count, dimension_);
  for (Index asked = count + 1;; asked *= 2) {
    const auto solved = solve(s, std::min(asked, dimension_));
    if (!solved) return Unexpected{solved.error()};
    if (levels_.complete || coinciding(levels_, count - 1).second < levels_.energies.size()) return &levels_;
  }
}

Result<const Levels*, RunError> ChipLevels::within(double s, double above) {
  for (Index asked = 4;; asked *= 2) {
    const auto solved = solve(s, std::min(asked, dimension_));
    if (!solved) return Unexpected{solved.error()};
    const double highest = levels_.energies[levels_.energies.size() - 1];
    if (levels_.complete || highest > levels_.energies[0] + above + kSameLevel * levels_.width) return &levels_;
  }
}

std::pair<Index, Index> coinciding(const Levels& levels, Index k) {
  const double same = kSameLevel * levels.width;
  Index first = k, last = k + 1;
  while (first > 0 && levels.energies[first] - levels.energies[first - 1] <= same) --first;
  while (last < levels.energies.size() && levels.energies[last] - levels.energies[last - 1] <= same) ++last;
  return {first, last};
}

}  // namespace tarn::runtime
