#pragma once
/// \file Scalar expressions of a chip and its experiment as a shared graph.
///
/// Constants are in internal units (ns, rad, hbar = 1). Equal subexpressions are one node.

#include <array>
#include <cstdint>
#include <optional>
#include <string>
#include <unordered_map>
#include <vector>

#include "lang/quantities/dimension.h"
#include "lang/source/span.h"

namespace tarn {
/// The syntax has nodes of its own; an inline namespace keeps the two apart for the linker.
inline namespace expressions {

struct NodeId {
  std::uint32_t row = 0;
  bool operator==(const NodeId&) const = default;
  auto operator<=>(const NodeId&) const = default;
};

enum class NodeOp : std::uint8_t {
  constant,    ///< `number`
  parameter,   ///< parameter `index` of the instance
  s, t, w,     ///< arguments: pace value, laboratory time, angular rate
  reading,     ///< reading `index` of the experiment: measured, known at run time only
  observable,  ///< value of observable `index`: in claims
  under,       ///< an observable under a named equation, row `index` of Instance::under: in claims
  offsets_on,  ///< 1; the runtime sets it to 0 to turn anneal offsets off
  table,       ///< table `index` at a
  neg, exp, ln, log10, sqrt, sin, cos, tan, asin, acos, atan, sinh, cosh, tanh, abs, floor, logical_not,
  add, sub, mul, div, pow, mod, min, max,
  less, less_equal, equal, not_equal, logical_and, logical_or,
  select       ///< a ? b : c
};

/// How many rows `to` stands below `from` in the list above: for tables that follow its order.
constexpr std::size_t distance(NodeOp from, NodeOp to) {
  return static_cast<std::size_t>(to) - static_cast<std::size_t>(from);
}

struct Node {
  NodeOp op = NodeOp::constant;
  NodeId a{}, b{}, c{};
  double number = 0;
  std::uint32_t index = 0;
  Dimension dimension{};
  bool truth = false;
  Span span{};  ///< Where it was first written.
};

/// How a table is read between its points.
enum class Interpolation : std::uint8_t { linear, monotone, spline, loglog };

/// Data of a table in internal units, x strictly ascending.
struct TableData {
  std::string name;  ///< As shown: curves.csv, column B [GHz].
  std::vector<double> x, y;
  Interpolation by = Interpolation::linear;
  bool hold_outside = true;  ///< A schedule keeps its end value; a density is zero.
  Span span;
};

/// Piece j covers knots[j] .. knots[j+1]: value = sum over k of c[k][j] (x - knots[j])^k.
/// Of a log-log table knots and values are natural logarithms. See lang/program/table.h.
struct PiecewiseCubic {
  std::vector<double> knots;             ///< Strictly ascending, at least two.
  std::array<std::vector<double>, 4> c;  ///< knots.size() - 1 each.
};

/// Nodes in order: operands precede their uses. Nodes are hash-consed by add().
struct Graph {
  std::vector<Node> nodes;
  std::vector<TableData> tables;
  std::unordered_map<std::uint64_t, std::vector<NodeId>> index;  ///< By hash of op and operands.

  const Node& operator[](NodeId id) const { return nodes[id.row]; }
  /// Returns an equal node if there is one (spans do not count), else appends. Operations on
  /// constants only are computed at once.
  NodeId add(Node node);
  NodeId constant(double number, Dimension dimension, Span span);
};

}  // namespace expressions

/// How many of a, b, c the operation reads.
int operand_count(NodeOp op);

/// What a node depends on, through all of its operands.
struct Dependence {
  bool s = false, t = false, w = false, readings = false, observables = false;
  std::vector<std::uint32_t> parameters;  ///< Ascending.
};
Dependence dependence(const Graph& graph, NodeId id);

/// Values for evaluating a graph outside compiled code: constants, counts, checks at samples.
struct Bindings {
  std::vector<double> parameters, readings, observables, under;
  double s = 0, t = 0, w = 0, offsets_on = 1;
};
/// The value of `id`; a truth is 0 or 1. Tables are read by the coefficients of
/// lang/program/table.h, as compiled code does. `mod` has the sign of the divisor.
double evaluate(const Graph& graph, NodeId id, const Bindings& at);

/// Evaluates some nodes at many bindings: what they need is collected once.
class Sampler {
 public:
  Sampler(const Graph& graph, const std::vector<NodeId>& roots);
  /// Rows of the nodes needed, ascending; operands precede their uses.
  const std::vector<std::uint32_t>& rows() const { return rows_; }
  void run(const Bindings& at);
  /// After run(). Precondition: the node is a root or below one.
  double value(NodeId id) const { return values_[id.row]; }

 private:
  const Graph& graph_;
  std::vector<std::uint32_t> rows_;
  std::vector<PiecewiseCubic> cubics_;  ///< By table; empty where not needed.
  std::vector<double> values_;
};

}  // namespace tarn
