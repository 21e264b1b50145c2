#include "lang/program/graph.h"

#include <algorithm>
#include <bit>
#include <cmath>

#include "lang/program/table.h"
#include "lang/support/check.h"

namespace tarn {
namespace {

std::uint64_t mix(std::uint64_t seed, std::uint64_t value) {
  seed ^= value + 0x9e3779b97f4a7c15ULL + (seed << 6) + (seed >> 2);
  return seed * 0xff51afd7ed558ccdULL;
}

std::uint64_t hash(const Node& node) {
  std::uint64_t key = mix(static_cast<std::uint64_t>(node.op), node.index);
  key = mix(key, node.a.row);
  key = mix(key, node.b.row);
  key = mix(key, node.c.row);
  return mix(key, std::bit_cast<std::uint64_t>(node.number));
}

bool same(const Node& a, const Node& b) {
  return a.op == b.op && a.a == b.a && a.b == b.b && a.c == b.c && a.index == b.index && a.truth == b.truth &&
         std::bit_cast<std::uint64_t>(a.number) == std::bit_cast<std::uint64_t>(b.number) && a.dimension == b.dimension;
}

using Unary = double (*)(double);
using Binary = double (*)(double, double);

/// In the order of NodeOp, from neg on.
constexpr std::array<Unary, 17> kUnary = {
    [](double x) { return -x; },
    [](double x) { return std::exp(x); },
    [](double x) { return std::log(x); },
    [](double x) { return std::log10(x); },
    [](double x) { return std::sqrt(x); },
    [](double x) { return std::sin(x); },
    [](double x) { return std::cos(x); },
    [](double x) { return std::tan(x); },
    [](double x) { return std::asin(x); },
    [](double x) { return std::acos(x); },
    [](double x) { return std::atan(x); },
    [](double x) { return std::sinh(x); },
    [](double x) { return std::cosh(x); },
    [](double x) { return std::tanh(x); },
    [](double x) { return std::abs(x); },
    [](double x) { return std::floor(x); },
    [](double x) { return x == 0 ? 1.0 : 0.0; },
};

/// In the order of NodeOp, from add on.
constexpr std::array<Binary, 14> kBinary = {
    [](double x, double y) { return x + y; },
    [](double x, double y) { return x - y; },
    [](double x, double y) { return x * y; },
    [](double x, double y) { return x / y; },
    [](double x, double y) { return std::pow(x, y); },
    [](double x, double y) { return x - y * std::floor(x / y); },
    [](double x, double y) { return y < x ? y : x; },
    [](double x, double y) { return x < y ? y : x; },
    [](double x, double y) { return x < y ? 1.0 : 0.0; },
    [](double x, double y) { return x <= y ? 1.0 : 0.0; },
    [](double x, double y) { return x == y ? 1.0 : 0.0; },
    [](double x, double y) { return x != y ? 1.0 : 0.0; },
    [](double x, double y) { return x != 0 && y != 0 ? 1.0 : 0.0; },
    [](double x, double y) { return x != 0 || y != 0 ? 1.0 : 0.0; },
};

double unary(NodeOp op, double x) { return kUnary.at(distance(NodeOp::neg, op))(x); }
double binary(NodeOp op, double x, double y) { return kBinary.at(distance(NodeOp::add, op))(x, y); }

bool is_constant(const Graph& graph, NodeId id, double value) {
  return graph[id].op == NodeOp::constant && graph[id].number == value;
}

std::optional<NodeId> constant_result(Graph& graph, const Node& node) {
  const int operands = operand_count(node.op);
  if (operands == 0 || node.op == NodeOp::table) return std::nullopt;
  if (graph[node.a].op != NodeOp::constant) return std::nullopt;
  if (operands == 3) return graph[node.a].number != 0 ? node.b : node.c;
  if (operands == 2 && graph[node.b].op != NodeOp::constant) return std::nullopt;
  Node result{.op = NodeOp::constant, .dimension = node.dimension, .truth = node.truth, .span = node.span};
  result.number = operands == 1 ? unary(node.op, graph[node.a].number)
                                : binary(node.op, graph[node.a].number, graph[node.b].number);
  return graph.add(result);
}

/// x*1, x+0, 0*x and the like. A factor whose dimension changes the product's stays.
std::optional<NodeId> neutral_result(Graph& graph, const Node& node) {
  const bool a_keeps = operand_count(node.op) == 2 && graph[node.a].dimension == node.dimension;
  const bool b_keeps = operand_count(node.op) == 2 && graph[node.b].dimension == node.dimension;
  const bool adds = node.op == NodeOp::add;
  if (adds && is_constant(graph, node.a, 0)) return node.b;
  if ((adds || node.op == NodeOp::sub) && is_constant(graph, node.b, 0)) return node.a;
  if (node.op == NodeOp::mul) {
    const bool zero = is_constant(graph, node.a, 0) || is_constant(graph, node.b, 0);
    if (zero) return graph.constant(0, node.dimension, node.span);
    if (is_constant(graph, node.a, 1) && b_keeps) return node.b;
    if (is_constant(graph, node.b, 1) && a_keeps) return node.a;
  }
  // The root of a square would have no derivative where the square vanishes.
  if (node.op == NodeOp::sqrt && graph[node.a].op == NodeOp::mul && graph[node.a].a == graph[node.a].b) {
    return graph.add({.op = NodeOp::abs, .a = graph[node.a].a, .dimension = node.dimension, .span = node.span});
  }
  const bool divides = node.op == NodeOp::div || node.op == NodeOp::pow;
  if (divides && is_constant(graph, node.b, 1) && a_keeps) return node.a;
  if (node.op == NodeOp::neg && graph[node.a].op == NodeOp::neg) return graph[node.a].a;
  return std::nullopt;
}

}  // namespace

int operand_count(NodeOp op) {
  if (op < NodeOp::table) return 0;
  if (op <= NodeOp::logical_not) return 1;
  return op == NodeOp::select ? 3 : 2;
}

NodeId Graph::add(Node node) {
  if (const auto folded = constant_result(*this, node)) return *folded;
  if (const auto neutral = neutral_result(*this, node)) return *neutral;
  std::vector<NodeId>& alike = index[hash(node)];
  for (const NodeId id : alike) {
    if (same(nodes[id.row], node)) return id;
  }
  const NodeId id{static_cast<std::uint32_t>(nodes.size())};
  nodes.push_back(node);
  alike.push_back(id);
  return id;
}

NodeId Graph::constant(double number, Dimension dimension, Span span) {
  return add({.op = NodeOp::constant, .number = number, .dimension = dimension, .span = span});
}

namespace {

/// Rows that the roots need, ascending.
std::vector<std::uint32_t> needed_rows(const Graph& graph, const std::vector<NodeId>& roots) {
  std::uint32_t top = 0;
  for (const NodeId root : roots) top = std::max(top, root.row + 1);
  std::vector<bool> needed(top, false);
  for (const NodeId root : roots) needed[root.row] = true;
  std::vector<std::uint32_t> rows;
  for (std::uint32_t row = top; row-- > 0;) {
    if (!needed[row]) continue;
    rows.push_back(row);
    const Node& node = graph.nodes[row];
    const int operands = operand_count(node.op);
    if (operands > 0) needed[node.a.row] = true;
    if (operands > 1) needed[node.b.row] = true;
    if (operands > 2) needed[node.c.row] = true;
  }
  std::reverse(rows.begin(), rows.end());
  return rows;
}

}  // namespace

Dependence dependence(const Graph& graph, NodeId id) {
  Dependence result;
  for (const std::uint32_t row : needed_rows(graph, {id})) {
    const Node& node = graph.nodes[row];
    if (node.op == NodeOp::s) result.s = true;
    if (node.op == NodeOp::t) result.t = true;
    if (node.op == NodeOp::w) result.w = true;
    if (node.op == NodeOp::reading) result.readings = true;
    if (node.op == NodeOp::observable || node.op == NodeOp::under) result.observables = true;
    if (node.op == NodeOp::parameter) result.parameters.push_back(node.index);
  }
  std::sort(result.parameters.begin(), result.parameters.end());
  const auto end = std::unique(result.parameters.begin(), result.parameters.end());
  result.parameters.erase(end, result.parameters.end());
  return result;
}

Sampler::Sampler(const Graph& graph, const std::vector<NodeId>& roots)
    : graph_(graph), rows_(needed_rows(graph, roots)), cubics_(graph.tables.size()) {
  for (const std::uint32_t row : rows_) {
    const Node& node = graph.nodes[row];
    if (node.op == NodeOp::table && cubics_[node.index].knots.empty()) {
      cubics_[node.index] = piecewise_cubic(graph.tables[node.index]);
    }
  }
  values_.resize(rows_.empty() ? 0 : rows_.back() + 1);
}

void Sampler::run(const Bindings& at) {
  const auto bound = [](const std::vector<double>& values, std::uint32_t index) {
    TARN_CHECK(index < values.size());
    return values[index];
  };
  const auto leaf = [&](const Node& node) {
    if (node.op == NodeOp::constant) return node.number;
    if (node.op == NodeOp::parameter) return bound(at.parameters, node.index);
    if (node.op == NodeOp::reading) return bound(at.readings, node.index);
    if (node.op == NodeOp::observable) return bound(at.observables, node.index);
    if (node.op == NodeOp::under) return bound(at.under, node.index);
    if (node.op == NodeOp::s) return at.s;
    if (node.op == NodeOp::t) return at.t;
    return node.op == NodeOp::w ? at.w : at.offsets_on;
  };
  for (const std::uint32_t row : rows_) {
    const Node& node = graph_.nodes[row];
    double& value = values_[row];
    const int operands = operand_count(node.op);
    if (operands == 0) {
      value = leaf(node);
    } else if (node.op == NodeOp::table) {
      value = read_table(graph_.tables[node.index], cubics_[node.index], values_[node.a.row]);
    } else if (operands == 1) {
      value = unary(node.op, values_[node.a.row]);
    } else if (operands == 2) {
      value = binary(node.op, values_[node.a.row], values_[node.b.row]);
    } else {
      value = values_[node.a.row] != 0 ? values_[node.b.row] : values_[node.c.row];
    }
  }
}

double evaluate(const Graph& graph, NodeId id, const Bindings& at) {
  Sampler sampler(graph, {id});
  sampler.run(at);
  return sampler.value(id);
}

}  // namespace tarn
