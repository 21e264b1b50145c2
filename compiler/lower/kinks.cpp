#include "compiler/lower/kinks.h"

#include <algorithm>
#include <map>

namespace tarn::compiler {
namespace {

/// Rows reachable from the roots, ascending.
std::vector<std::uint32_t> reachable(const Graph& graph, const std::vector<NodeId>& roots) {
  std::vector<bool> seen(graph.nodes.size(), false);
  for (const NodeId root : roots) seen[root.row] = true;
  std::vector<std::uint32_t> rows;
  for (std::size_t i = graph.nodes.size(); i-- > 0;) {
    if (!seen[i]) continue;
    rows.push_back(static_cast<std::uint32_t>(i));
    const Node& node = graph.nodes[i];
    if (node.op == NodeOp::constant || node.op < NodeOp::table) continue;
    for (const NodeId operand : {node.a, node.b, node.c}) {
      if (operand.row < i) seen[operand.row] = true;
    }
  }
  std::reverse(rows.begin(), rows.end());
  return rows;
}

class KinkFinder {
 public:
  explicit KinkFinder(Graph& graph) : graph_(graph) {}

  void visit(std::uint32_t row) {
    const Node node = graph_.nodes[row];
    if (node.op == NodeOp::abs) add(node.a, {0});
    if (node.op == NodeOp::min || node.op == NodeOp::max) add_difference(node.a, node.b);
    if (node.op == NodeOp::less || node.op == NodeOp::less_equal) add_difference(node.a, node.b);
    if (node.op == NodeOp::table) add(node.a, knots(graph_.tables[node.index]));
  }

  std::vector<KinkCondition> conditions() const {
    std::vector<KinkCondition> result;
    for (const auto& [node, levels] : found_) result.push_back({node, levels});
    return result;
  }

 private:
  static std::vector<double> knots(const TableData& table) {
    if (table.by == Interpolation::spline) return {table.x.front(), table.x.back()};
    return table.x;
  }

  void add_difference(NodeId a, NodeId b) {
    if (!depends_on_s(a) && !depends_on_s(b)) return;
    const Dimension dimension = graph_[a].dimension;
    add(graph_.add({.op = NodeOp::sub, .a = a, .b = b, .dimension = dimension}), {0});
  }

  void add(NodeId node, const std::vector<double>& levels) {
    if (!depends_on_s(node)) return;
    auto& all = found_[node];
    all.insert(all.end(), levels.begin(), levels.end());
    std::sort(all.begin(), all.end());
    all.erase(std::unique(all.begin(), all.end()), all.end());
  }

  bool depends_on_s(NodeId node) const {
    const Dependence reads = dependence(graph_, node);
    return reads.s && !reads.t;
  }

  Graph& graph_;
  std::map<NodeId, std::vector<double>> found_;
};

}  // namespace

std::vector<KinkCondition> find_kinks(Graph& graph, const std::vector<NodeId>& roots) {
  KinkFinder finder(graph);
  for (const std::uint32_t row : reachable(graph, roots)) finder.visit(row);
  return finder.conditions();
}

}  // namespace tarn::compiler
