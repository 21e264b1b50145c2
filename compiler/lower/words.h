#pragma once
/// \file Algebra of Pauli words: products, transposes, and superoperators on 2n bits.

#include <cstdint>

#include "runtime/plan/operators.h"

namespace tarn::compiler {

/// a b as a factor and a word.
runtime::WordTerm product(const runtime::PauliWord& a, const runtime::PauliWord& b);

/// The transpose of a word is the word or its negative: +1 or -1.
double transpose_sign(const runtime::PauliWord& word);

/// The word that acts on the row index (upper n bits) as `left` and on the column index (lower n
/// bits) as `right`: rho -> left rho right^T.
runtime::PauliWord side_by_side(const runtime::PauliWord& left, const runtime::PauliWord& right,
                                std::uint32_t bits);

}  // namespace tarn::compiler
