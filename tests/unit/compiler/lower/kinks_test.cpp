#include "compiler/lower/kinks.h"

#include <catch2/catch.hpp>

using namespace tarn;
using namespace tarn::compiler;

TEST_CASE("kinks are where an absolute value vanishes and where a linear table has its points") {
  Graph graph;
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId shifted = graph.add({.op = NodeOp::sub, .a = s, .b = graph.constant(0.3, kNumber, {})});
  const NodeId folded = graph.add({.op = NodeOp::abs, .a = shifted});
  graph.tables.push_back({"t.csv", {0, 0.5, 1}, {1, 2, 5}, Interpolation::linear});
  const NodeId table = graph.add({.op = NodeOp::table, .a = s, .index = 0});
  const auto found = find_kinks(graph, {folded, table});
  REQUIRE(found.size() == 2);
  CHECK(found[0].node == s);
  CHECK(found[0].levels == std::vector<double>{0, 0.5, 1});
  CHECK(found[1].node == shifted);
  CHECK(found[1].levels == std::vector<double>{0});
}

TEST_CASE("what does not depend on s, or on t as well, is no kink in s") {
  Graph graph;
  const NodeId t = graph.add({.op = NodeOp::t});
  const NodeId s = graph.add({.op = NodeOp::s});
  const NodeId both = graph.add({.op = NodeOp::mul, .a = s, .b = t});
  const NodeId parameter = graph.add({.op = NodeOp::parameter, .index = 0});
  const std::vector<NodeId> roots{graph.add({.op = NodeOp::abs, .a = both}), graph.add({.op = NodeOp::abs, .a = parameter})};
  CHECK(find_kinks(graph, roots).empty());
}
