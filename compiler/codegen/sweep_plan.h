#pragma once
/// \file How a generator is applied: its words sorted by the bits they flip.
///
/// Component j of G x is the sum over flips m of (a_m(j) + i b_m(j)) x(j ^ m). What does not depend
/// on j is a linear form in the coefficients; what does is a sum of coefficients times vectors of
/// +-factors that `prepare` computes once.

#include <cstdint>
#include <optional>
#include <utility>
#include <vector>

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Sum of coefficient[first] * second. Rows increase, factors are not zero; empty is zero.
using LinearForm = std::vector<std::pair<std::uint32_t, double>>;

/// v(j) = sum of factor * (-1)^popcount(z & j): the Walsh transform of a few factors at their z.
struct SignVector {
  std::vector<std::pair<std::uint64_t, double>> spectrum;  ///< (z, factor), z increasing.
  bool operator==(const SignVector&) const = default;
};

/// coefficient[row] times sign vector number `vector`.
struct PreparedTerm {
  std::uint32_t row = 0;
  std::uint32_t vector = 0;
};

struct Flip {
  std::uint64_t mask = 0;
  LinearForm real, imaginary;
  std::vector<PreparedTerm> prepared_real, prepared_imaginary;
};

/// A diagonal with so many coefficients that its sign vectors would cost more to read than to sum
/// anew: d(j) = sum of forms * (-1)^popcount(z & j), transformed before each sweep.
struct SummedDiagonal {
  bool imaginary = false;
  std::vector<std::pair<std::uint64_t, LinearForm>> spectrum;  ///< (z, form), z increasing.
};

struct SweepPlan {
  std::uint32_t bits = 0;
  std::vector<Flip> flips;           ///< Masks increase; none is empty.
  std::vector<SignVector> vectors;   ///< No two equal.
  std::optional<SummedDiagonal> diagonal;
  /// Doubles that `prepare` fills: 2^bits a sign vector, one after another.
  std::uint64_t prepared_doubles() const { return static_cast<std::uint64_t>(vectors.size()) << bits; }
};

/// The plan of a sweep over a whole vector.
SweepPlan plan_sweep(const ir::Generator& generator);

/// The same without a summed diagonal: what row_elements() takes.
SweepPlan plan_elements(const ir::Generator& generator);

/// One matrix element as a complex linear form: G(j, j ^ mask).
struct Element {
  std::uint64_t mask = 0;
  LinearForm real, imaginary;
};

/// The elements of row j that are not zero identically, by mask. For small generators, from
/// plan_elements().
std::vector<Element> row_elements(const SweepPlan& plan, std::uint64_t j);

}  // namespace tarn::compiler
