#pragma once
/// \file Random modules for property tests, a pure function of the seed.

#include <random>

#include "compiler/ir/module.h"

namespace tarn::test {

/// Three inputs, two tables, and `functions` random expressions of s, t, w, inputs and tables in set
/// 0, all operations among them. Values may be infinite or no numbers at some points.
ir::Module random_functions(unsigned seed, std::uint32_t functions);

/// Adds a generator of `words` random Pauli words on `bits` bits with random complex factors, spread
/// over the functions of set 0. `real_factors` leaves the imaginary parts out.
void add_random_generator(ir::Module& module, unsigned seed, std::uint32_t bits, std::size_t words, bool real_factors);

/// A module without inputs whose set 0 holds `rows` functions 0.5 + row + s.
ir::Module simple_coefficients(std::uint32_t rows);

/// A piecewise cubic on uneven knots over [low, high]; continuity is not its business.
ir::Table random_table(std::mt19937& random, const std::string& name, std::size_t pieces, double low, double high);

}  // namespace tarn::test
