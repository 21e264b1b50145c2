#include "lang/program/operators.h"

#include <catch2/catch.hpp>

#include <Eigen/Core>
#include <bit>
#include <map>

// Reference: Kronecker products of the Pauli matrices by Eigen; the first qubit is the leftmost factor.

using namespace tarn;

namespace {

using Matrix = Eigen::MatrixXcd;
using Complex = std::complex<double>;

Matrix pauli_matrix(char letter) {
  Matrix m(2, 2);
  if (letter == 'I') m << 1, 0, 0, 1;
  if (letter == 'X') m << 0, 1, 1, 0;
  if (letter == 'Y') m << 0, Complex(0, -1), Complex(0, 1), 0;
  if (letter == 'Z') m << 1, 0, 0, -1;
  return m;
}

Matrix kron(const Matrix& a, const Matrix& b) {
  Matrix m(a.rows() * b.rows(), a.cols() * b.cols());
  for (Eigen::Index i = 0; i < a.rows(); ++i) {
    for (Eigen::Index j = 0; j < a.cols(); ++j) m.block(i * b.rows(), j * b.cols(), b.rows(), b.cols()) = a(i, j) * b;
  }
  return m;
}

Matrix word_matrix(const std::string& word) {
  Matrix m = Matrix::Identity(1, 1);
  for (const char letter : word) m = kron(m, pauli_matrix(letter));
  return m;
}

/// By the definition of a word: <i ^ x| word |i> = i^popcount(x & z) (-1)^popcount(z & i).
Matrix to_matrix(const Operator& op, const Graph& graph, std::uint32_t qubits) {
  const auto n = std::uint64_t{1} << qubits;
  Matrix m = Matrix::Zero(static_cast<Eigen::Index>(n), static_cast<Eigen::Index>(n));
  const Complex powers[] = {{1, 0}, {0, 1}, {-1, 0}, {0, -1}};
  for (const OperatorTerm& term : most_significant_first(op, qubits)) {
    const Complex c = term.factor * graph[term.coefficient].number * powers[std::popcount(term.word.x & term.word.z) % 4];
    for (std::uint64_t i = 0; i < n; ++i) {
      const double sign = std::popcount(term.word.z & i) % 2 == 0 ? 1 : -1;
      m(static_cast<Eigen::Index>(i ^ term.word.x), static_cast<Eigen::Index>(i)) += c * sign;
    }
  }
  return m;
}

}  // namespace

TEST_CASE("words and their products are those of the Pauli matrices") {
  Graph graph;
  for (const std::string a : {"II", "XY", "YZ", "ZX", "YY", "IZ"}) {
    const Operator left = pauli(graph, a, {0, 1}, {});
    CHECK((to_matrix(left, graph, 2) - word_matrix(a)).norm() < 1e-14);
    for (const std::string b : {"XX", "YI", "ZY", "IX", "YY"}) {
      const Operator both = product(graph, left, pauli(graph, b, {0, 1}, {}), {});
      CHECK((to_matrix(both, graph, 2) - word_matrix(a) * word_matrix(b)).norm() < 1e-14);
    }
  }
}

TEST_CASE("letters act on the qubits named, in their order") {
  Graph graph;
  CHECK((to_matrix(pauli(graph, "XZ", {2, 0}, {}), graph, 3) - word_matrix("ZIX")).norm() < 1e-14);
}

TEST_CASE("a ketbra has one entry") {
  Graph graph;
  Matrix expected = Matrix::Zero(4, 4);
  expected(0b01, 0b10) = 1;
  CHECK((to_matrix(ketbra(graph, "01", "10", {0, 1}, {}), graph, 2) - expected).norm() < 1e-14);
  CHECK_FALSE(is_hermitian(ketbra(graph, "01", "10", {0, 1}, {})));
  CHECK(is_hermitian(sum(ketbra(graph, "01", "10", {0, 1}, {}), ketbra(graph, "10", "01", {0, 1}, {}))));
}

TEST_CASE("terms of one coefficient and word join, and vanish where they cancel") {
  Graph graph;
  const Operator z = pauli(graph, "Z", {0}, {});
  const NodeId s = graph.add({.op = NodeOp::s});
  const Operator a = times(graph, z, s, {});
  CHECK(sum(a, scaled(a, 2)).size() == 1);
  CHECK(sum(a, scaled(a, 2)).front().factor == Complex(3));
  CHECK(sum(a, scaled(a, -1)).empty());
}

TEST_CASE("constant factors leave the coefficient") {
  Graph graph;
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId minus = graph.add({.op = NodeOp::neg, .a = s});
  const NodeId half = graph.add({.op = NodeOp::div, .a = minus, .b = graph.constant(2, kNumber, {})});
  const Operator op = times(graph, pauli(graph, "X", {0}, {}), half, {});
  CHECK(op.front().coefficient == s);
  CHECK(op.front().factor == Complex(-0.5));
}
