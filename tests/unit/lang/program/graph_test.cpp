#include "lang/program/graph.h"

#include <catch2/catch.hpp>

#include <cmath>

using namespace tarn;

namespace {

NodeId binary(Graph& graph, NodeOp op, NodeId a, NodeId b) { return graph.add({.op = op, .a = a, .b = b}); }
NodeId number(Graph& graph, double x) { return graph.constant(x, kNumber, {}); }

}  // namespace

TEST_CASE("equal expressions are one node, constants are computed") {
  Graph graph;
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId first = binary(graph, NodeOp::mul, s, number(graph, 2));
  const NodeId again = binary(graph, NodeOp::mul, s, number(graph, 2));
  CHECK(first == again);
  const NodeId six = binary(graph, NodeOp::mul, number(graph, 2), number(graph, 3));
  CHECK(graph[six].op == NodeOp::constant);
  CHECK(graph[six].number == 6);
  CHECK(binary(graph, NodeOp::mul, s, number(graph, 1)) == s);
  CHECK(binary(graph, NodeOp::add, number(graph, 0), s) == s);
  CHECK(graph[binary(graph, NodeOp::mul, s, number(graph, 0))].number == 0);
}

TEST_CASE("a factor of one with a dimension is kept") {
  Graph graph;
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId one = graph.constant(1, kTime, {});
  const NodeId product = graph.add({.op = NodeOp::mul, .a = s, .b = one, .dimension = kTime});
  CHECK(graph[product].dimension == kTime);
}

TEST_CASE("constants of different dimension are different nodes") {
  Graph graph;
  CHECK_FALSE(graph.constant(1, kTime, {}) == graph.constant(1, kNumber, {}));
}

TEST_CASE("evaluation reads arguments, parameters and tables") {
  Graph graph;
  graph.tables.push_back({"t", {0, 1}, {0, 10}, Interpolation::linear, true, {}});
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId table = graph.add({.op = NodeOp::table, .a = s, .index = 0});
  const NodeId p = graph.add({.op = NodeOp::parameter, .index = 1});
  const NodeId sum = binary(graph, NodeOp::add, table, p);
  Bindings at;
  at.s = 0.25;
  at.parameters = {100, 7};
  CHECK(evaluate(graph, sum, at) == Approx(9.5));
  const NodeId less = graph.add({.op = NodeOp::less, .a = s, .b = p, .truth = true});
  const NodeId choice = graph.add({.op = NodeOp::select, .a = less, .b = s, .c = p});
  CHECK(evaluate(graph, choice, at) == 0.25);
  CHECK(evaluate(graph, binary(graph, NodeOp::mod, number(graph, -1), p), at) == 6);  // sign of the divisor
  CHECK(evaluate(graph, graph.add({.op = NodeOp::exp, .a = s}), at) == std::exp(0.25));
}

TEST_CASE("dependence goes through all operands") {
  Graph graph;
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId t = graph.add({.op = NodeOp::t});
  const NodeId p = graph.add({.op = NodeOp::parameter, .index = 3});
  const Dependence reads = dependence(graph, binary(graph, NodeOp::mul, binary(graph, NodeOp::add, s, p), p));
  CHECK(reads.s);
  CHECK_FALSE(reads.t);
  CHECK(reads.parameters == std::vector<std::uint32_t>{3});
  CHECK(dependence(graph, t).t);
}

TEST_CASE("the root of a square is the modulus, so that it has a derivative at zero") {
  Graph graph;
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId root = graph.add({.op = NodeOp::sqrt, .a = binary(graph, NodeOp::mul, s, s)});
  CHECK(graph[root].op == NodeOp::abs);
}
