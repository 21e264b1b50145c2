#pragma once
/// \file Sums of Pauli words with coefficient functions: the algebra of operators.
///
/// While a chip is unrolled its size is not known, so qubit q is bit q of a word here;
/// most_significant_first() turns the finished operators round.

#include <complex>
#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "lang/program/instance.h"

namespace tarn {

/// Letters I X Y Z on the qubits given; precondition: as many letters as qubits, all different.
Operator pauli(Graph& graph, std::string_view letters, const std::vector<std::uint32_t>& qubits, Span span);

/// |ket><bra| on the qubits given: 2^k words. Precondition: equal lengths, all qubits different.
Operator ketbra(Graph& graph, std::string_view ket, std::string_view bra, const std::vector<std::uint32_t>& qubits,
                Span span);

Operator sum(Operator a, const Operator& b);
Operator scaled(Operator a, double factor);
/// coefficient * a, or a / coefficient. Plain constants go into the factors, so that terms of one
/// coefficient function are recognised as such.
Operator times(Graph& graph, Operator a, NodeId coefficient, Span span);
Operator divided(Graph& graph, Operator a, NodeId coefficient, Span span);
/// The matrix product a b.
Operator product(Graph& graph, const Operator& a, const Operator& b, Span span);

/// Real factors: every word is Hermitian by itself and coefficients are real.
bool is_hermitian(const Operator& op);

/// Qubit q becomes bit qubits - 1 - q.
Operator most_significant_first(Operator op, std::uint32_t qubits);

/// `X`, `ZZ` ...: the letters of a word on its first `qubits` bits (bit q is letter q).
std::string letters(Word word, std::uint32_t qubits);

}  // namespace tarn
