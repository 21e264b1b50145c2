#include "compiler/lower/claims.h"

#include <optional>

namespace tarn::compiler {
namespace {

std::optional<runtime::Relation> relation(NodeOp op) {
  if (op == NodeOp::less) return runtime::Relation::less;
  if (op == NodeOp::less_equal) return runtime::Relation::less_equal;
  if (op == NodeOp::equal) return runtime::Relation::equal;
  if (op == NodeOp::not_equal) return runtime::Relation::not_equal;
  return std::nullopt;
}

}  // namespace

runtime::ClaimNode claim_tree(const Graph& graph, NodeId claim, const ExperimentRows& rows) {
  const Node& node = graph[claim];
  runtime::ClaimNode result;
  const bool joins = node.op == NodeOp::logical_and || node.op == NodeOp::logical_or;
  if (joins) {
    result.kind = node.op == NodeOp::logical_and ? runtime::ClaimKind::all : runtime::ClaimKind::any;
    result.children = {claim_tree(graph, node.a, rows), claim_tree(graph, node.b, rows)};
  } else if (node.op == NodeOp::logical_not) {
    result.kind = runtime::ClaimKind::no;
    result.children = {claim_tree(graph, node.a, rows)};
  } else if (const auto found = relation(node.op); found && !graph[node.a].truth) {
    result.kind = runtime::ClaimKind::compare;
    result.relation = *found;
    result.lhs = rows.row(runtime::kClaims, node.a);
    result.rhs = rows.row(runtime::kClaims, node.b);
  } else {
    result.lhs = rows.row(runtime::kClaims, claim);
  }
  return result;
}

}  // namespace tarn::compiler
