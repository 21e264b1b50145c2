#include "lang/program/operators.h"

#include <algorithm>
#include <array>
#include <bit>
#include <map>

#include "lang/support/check.h"

namespace tarn {
namespace {

using Complex = std::complex<double>;
constexpr std::array<Complex, 4> kPowersOfI = {Complex(1, 0), Complex(0, 1), Complex(-1, 0), Complex(0, -1)};

std::uint64_t bit(std::uint32_t qubit) { return std::uint64_t{1} << qubit; }

Operator merged(const Operator& terms) {
  std::map<std::pair<NodeId, Word>, std::size_t> seen;
  Operator result;
  for (const OperatorTerm& term : terms) {
    const auto [found, is_new] = seen.try_emplace({term.coefficient, term.word}, result.size());
    if (is_new) {
      result.push_back(term);
    } else {
      result[found->second].factor += term.factor;
    }
  }
  std::erase_if(result, [](const OperatorTerm& term) { return term.factor == Complex(0); });
  return result;
}

struct Split {
  double factor;
  NodeId rest;
};

bool is_plain_constant(const Graph& graph, NodeId id) {
  return graph[id].op == NodeOp::constant && graph[id].dimension.is_number();
}

/// id = factor * rest with the constant factors taken out.
Split split(Graph& graph, NodeId id) {
  double factor = 1;
  while (true) {
    const Node node = graph[id];
    if (node.op == NodeOp::neg) {
      factor = -factor;
      id = node.a;
    } else if (node.op == NodeOp::mul && is_plain_constant(graph, node.a)) {
      factor *= graph[node.a].number;
      id = node.b;
    } else if (node.op == NodeOp::mul && is_plain_constant(graph, node.b)) {
      factor *= graph[node.b].number;
      id = node.a;
    } else if (node.op == NodeOp::div && is_plain_constant(graph, node.b)) {
      factor /= graph[node.b].number;
      id = node.a;
    } else if (node.op == NodeOp::constant && node.number != 1) {
      return {factor * node.number, graph.constant(1, node.dimension, node.span)};
    } else {
      return {factor, id};
    }
  }
}

/// Replaces every coefficient c by change(c).
template <class Change>
Operator with_coefficients(Graph& graph, Operator op, const Change& change) {
  for (OperatorTerm& term : op) {
    const Split parts = split(graph, change(term.coefficient));
    term.factor *= parts.factor;
    term.coefficient = parts.rest;
  }
  return merged(op);
}

NodeId quotient_or_product(Graph& graph, NodeOp op, NodeId a, NodeId b, Span span) {
  const Dimension left = graph[a].dimension;
  const Dimension right = graph[b].dimension;
  return graph.add({.op = op, .a = a, .b = b, .dimension = op == NodeOp::mul ? left * right : left / right, .span = span});
}

}  // namespace

Operator pauli(Graph& graph, std::string_view letters, const std::vector<std::uint32_t>& qubits, Span span) {
  TARN_CHECK(letters.size() == qubits.size());
  Word word;
  for (std::size_t k = 0; k < letters.size(); ++k) {
    if (letters[k] == 'X' || letters[k] == 'Y') word.x |= bit(qubits[k]);
    if (letters[k] == 'Z' || letters[k] == 'Y') word.z |= bit(qubits[k]);
  }
  return {{1.0, graph.constant(1, kNumber, span), word}};
}

Operator ketbra(Graph& graph, std::string_view ket, std::string_view bra, const std::vector<std::uint32_t>& qubits,
                Span span) {
  TARN_CHECK(ket.size() == qubits.size() && bra.size() == qubits.size());
  // |0><0| = (I + Z)/2, |1><1| = (I - Z)/2, |0><1| = (X + iY)/2, |1><0| = (X - iY)/2.
  Operator result = pauli(graph, "", {}, span);
  for (std::size_t k = 0; k < ket.size(); ++k) {
    const bool diagonal = ket[k] == bra[k];
    Word first, second;
    if (!diagonal) first.x = second.x = bit(qubits[k]);
    second.z = bit(qubits[k]);
    const Complex half = diagonal ? Complex(0.5) : Complex(0, 0.5);
    const Complex sign = ket[k] == '0' ? 1.0 : -1.0;
    const NodeId one = graph.constant(1, kNumber, span);
    result = product(graph, result, {{0.5, one, first}, {sign * half, one, second}}, span);
  }
  return result;
}

Operator sum(Operator a, const Operator& b) {
  a.insert(a.end(), b.begin(), b.end());
  return merged(a);
}

Operator scaled(Operator a, double factor) {
  for (OperatorTerm& term : a) term.factor *= factor;
  return merged(a);
}

Operator times(Graph& graph, Operator a, NodeId coefficient, Span span) {
  return with_coefficients(graph, std::move(a), [&](NodeId c) {
    return quotient_or_product(graph, NodeOp::mul, coefficient, c, span);
  });
}

Operator divided(Graph& graph, Operator a, NodeId coefficient, Span span) {
  return with_coefficients(graph, std::move(a), [&](NodeId c) {
    return quotient_or_product(graph, NodeOp::div, c, coefficient, span);
  });
}

Operator product(Graph& graph, const Operator& a, const Operator& b, Span span) {
  Operator result;
  result.reserve(a.size() * b.size());
  for (const OperatorTerm& left : a) {
    for (const OperatorTerm& right : b) {
      const Word word{left.word.x ^ right.word.x, left.word.z ^ right.word.z};
      const int turns = std::popcount(left.word.x & left.word.z) + std::popcount(right.word.x & right.word.z) +
                        2 * std::popcount(left.word.z & right.word.x) + 3 * std::popcount(word.x & word.z);
      const NodeId both = quotient_or_product(graph, NodeOp::mul, left.coefficient, right.coefficient, span);
      const Split parts = split(graph, both);
      const Complex phase = kPowersOfI[static_cast<std::size_t>(turns % 4)];
      result.push_back({left.factor * right.factor * phase * parts.factor, parts.rest, word});
    }
  }
  return merged(result);
}

bool is_hermitian(const Operator& op) {
  double largest = 0;
  for (const OperatorTerm& term : op) largest = std::max(largest, std::abs(term.factor));
  return std::all_of(op.begin(), op.end(),
                     [&](const OperatorTerm& term) { return std::abs(term.factor.imag()) <= 1e-14 * largest; });
}

Operator most_significant_first(Operator op, std::uint32_t qubits) {
  const auto turned = [&](std::uint64_t bits) {
    std::uint64_t result = 0;
    for (std::uint32_t q = 0; q < qubits; ++q) {
      if ((bits & bit(q)) != 0) result |= bit(qubits - 1 - q);
    }
    return result;
  };
  for (OperatorTerm& term : op) term.word = {turned(term.word.x), turned(term.word.z)};
  return op;
}

std::string letters(Word word, std::uint32_t qubits) {
  std::string result;
  for (std::uint32_t q = 0; q < qubits; ++q) {
    const bool x = (word.x & bit(q)) != 0;
    const bool z = (word.z & bit(q)) != 0;
    result += x ? (z ? 'Y' : 'X') : (z ? 'Z' : 'I');
  }
  return result;
}

}  // namespace tarn
