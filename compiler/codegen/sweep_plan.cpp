#include "compiler/codegen/sweep_plan.h"

#include <algorithm>
#include <bit>
#include <complex>
#include <map>

namespace tarn::compiler {
namespace {

constexpr std::size_t kMostPrepared = 5;      ///< Sign vectors of a diagonal; more are summed anew.
constexpr std::uint32_t kSummedFromBits = 7;  ///< Smaller diagonals stay in the first-level cache.

/// Factors of (-1)^popcount(z & j) by z, for one flip and one coefficient.
using Spectrum = std::map<std::uint64_t, double>;
struct Parts {
  Spectrum real, imaginary;
};

/// The factor of (-1)^popcount(z & j) in component j: factor (-i)^popcount(x & z).
std::complex<double> output_factor(const runtime::WordTerm& term) {
  const std::complex<double> f = term.factor;
  switch (std::popcount(term.word.x & term.word.z) & 3) {
    case 1: return {f.imag(), -f.real()};
    case 2: return -f;
    case 3: return {-f.imag(), f.real()};
    default: return f;
  }
}

class Planner {
 public:
  Planner(const ir::Generator& generator, bool may_sum) : may_sum_(may_sum && generator.bits >= kSummedFromBits) {
    plan_.bits = generator.bits;
    for (const auto& group : generator.sum.groups) {
      for (const auto& term : group.terms) {
        const auto factor = output_factor(term);
        Parts& parts = parts_[term.word.x][group.coefficient];
        if (factor.real() != 0) parts.real[term.word.z] += factor.real();
        if (factor.imag() != 0) parts.imaginary[term.word.z] += factor.imag();
      }
    }
  }

  SweepPlan run() {
    if (may_sum_ && parts_.contains(0) && !take_diagonal(false)) take_diagonal(true);
    for (const auto& [mask, rows] : parts_) {
      Flip flip;
      flip.mask = mask;
      for (const auto& [row, parts] : rows) {
        place(row, parts.real, flip.real, flip.prepared_real);
        place(row, parts.imaginary, flip.imaginary, flip.prepared_imaginary);
      }
      const bool empty = flip.real.empty() && flip.imaginary.empty() && flip.prepared_real.empty() && flip.prepared_imaginary.empty();
      if (!empty) plan_.flips.push_back(std::move(flip));
    }
    return std::move(plan_);
  }

 private:
  /// Moves one part of the diagonal out if it has too many coefficients. False if it has not.
  bool take_diagonal(bool imaginary) {
    std::map<std::uint64_t, LinearForm> forms;
    std::size_t vectors = 0;
    for (auto& [row, parts] : parts_.at(0)) {
      const Spectrum& spectrum = imaginary ? parts.imaginary : parts.real;
      vectors += spectrum.size() > 1 || (spectrum.size() == 1 && spectrum.begin()->first != 0) ? 1u : 0u;
      for (const auto& [z, factor] : spectrum)
        if (factor != 0) forms[z].emplace_back(row, factor);
    }
    if (vectors <= kMostPrepared) return false;
    for (auto& [row, parts] : parts_.at(0)) (imaginary ? parts.imaginary : parts.real).clear();
    plan_.diagonal = SummedDiagonal{imaginary, {forms.begin(), forms.end()}};
    return true;
  }

  void place(std::uint32_t row, const Spectrum& spectrum, LinearForm& form, std::vector<PreparedTerm>& prepared) {
    SignVector vector;
    for (const auto& [z, factor] : spectrum)
      if (factor != 0) vector.spectrum.emplace_back(z, factor);
    if (vector.spectrum.empty()) return;
    if (vector.spectrum.size() == 1 && vector.spectrum[0].first == 0) {
      form.emplace_back(row, vector.spectrum[0].second);
    } else {
      prepared.push_back({row, number_of(std::move(vector))});
    }
  }

  std::uint32_t number_of(SignVector vector) {
    const auto [place, is_new] = numbers_.try_emplace(vector.spectrum, static_cast<std::uint32_t>(plan_.vectors.size()));
    if (is_new) plan_.vectors.push_back(std::move(vector));
    return place->second;
  }

  bool may_sum_;
  SweepPlan plan_;
  std::map<std::uint64_t, std::map<std::uint32_t, Parts>> parts_;
  std::map<std::vector<std::pair<std::uint64_t, double>>, std::uint32_t> numbers_;
};

LinearForm at(const SweepPlan& plan, const LinearForm& uniform, const std::vector<PreparedTerm>& prepared, std::uint64_t j) {
  std::map<std::uint32_t, double> sum(uniform.begin(), uniform.end());
  for (const PreparedTerm& term : prepared)
    for (const auto& [z, factor] : plan.vectors[term.vector].spectrum)
      sum[term.row] += (std::popcount(z & j) & 1) != 0 ? -factor : factor;
  LinearForm form;
  for (const auto& entry : sum)
    if (entry.second != 0) form.push_back(entry);
  return form;
}

}  // namespace

SweepPlan plan_sweep(const ir::Generator& generator) { return Planner(generator, true).run(); }

SweepPlan plan_elements(const ir::Generator& generator) { return Planner(generator, false).run(); }

std::vector<Element> row_elements(const SweepPlan& plan, std::uint64_t j) {
  std::vector<Element> elements;
  for (const Flip& flip : plan.flips) {
    Element element{flip.mask, at(plan, flip.real, flip.prepared_real, j), at(plan, flip.imaginary, flip.prepared_imaginary, j)};
    if (!element.real.empty() || !element.imaginary.empty()) elements.push_back(std::move(element));
  }
  return elements;
}

}  // namespace tarn::compiler
