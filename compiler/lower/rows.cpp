#include "compiler/lower/rows.h"

#include <cmath>
#include <optional>

#include "lang/program/table.h"
#include "lang/support/check.h"

namespace tarn::compiler {
namespace {

using ir::BinaryOp;
using ir::UnaryOp;
using ir::ValueId;

std::optional<UnaryOp> unary(NodeOp op) {
  static const std::map<NodeOp, UnaryOp> kOps = {
      {NodeOp::neg, UnaryOp::neg},     {NodeOp::exp, UnaryOp::exp},     {NodeOp::ln, UnaryOp::ln},
      {NodeOp::log10, UnaryOp::log10}, {NodeOp::sqrt, UnaryOp::sqrt},   {NodeOp::sin, UnaryOp::sin},
      {NodeOp::cos, UnaryOp::cos},     {NodeOp::tan, UnaryOp::tan},     {NodeOp::asin, UnaryOp::asin},
      {NodeOp::acos, UnaryOp::acos},   {NodeOp::atan, UnaryOp::atan},   {NodeOp::sinh, UnaryOp::sinh},
      {NodeOp::cosh, UnaryOp::cosh},   {NodeOp::tanh, UnaryOp::tanh},   {NodeOp::abs, UnaryOp::abs},
      {NodeOp::floor, UnaryOp::floor}, {NodeOp::logical_not, UnaryOp::logical_not}};
  const auto found = kOps.find(op);
  return found == kOps.end() ? std::nullopt : std::optional(found->second);
}

std::optional<BinaryOp> binary(NodeOp op) {
  static const std::map<NodeOp, BinaryOp> kOps = {{NodeOp::add, BinaryOp::add},
                                                  {NodeOp::sub, BinaryOp::sub},
                                                  {NodeOp::mul, BinaryOp::mul},
                                                  {NodeOp::div, BinaryOp::div},
                                                  {NodeOp::pow, BinaryOp::pow},
                                                  {NodeOp::mod, BinaryOp::mod},
                                                  {NodeOp::min, BinaryOp::min},
                                                  {NodeOp::max, BinaryOp::max},
                                                  {NodeOp::less, BinaryOp::less},
                                                  {NodeOp::less_equal, BinaryOp::less_equal},
                                                  {NodeOp::equal, BinaryOp::equal},
                                                  {NodeOp::not_equal, BinaryOp::not_equal},
                                                  {NodeOp::logical_and, BinaryOp::logical_and},
                                                  {NodeOp::logical_or, BinaryOp::logical_or}};
  const auto found = kOps.find(op);
  return found == kOps.end() ? std::nullopt : std::optional(found->second);
}

ir::Table to_table(const TableData& data) {
  const PiecewiseCubic cubic = piecewise_cubic(data);
  ir::Table table{.name = data.name, .knots = cubic.knots};
  for (std::size_t k = 0; k < 4; ++k) table.c[k] = cubic.c[k];
  return table;
}

/// Inside its knots a log-log table is exp(T(ln x)); outside it holds or is zero like any other.
ValueId read_table(const TableData& data, ir::TableId id, ValueId x, ir::Module& module) {
  const ir::Outside outside = data.hold_outside ? ir::Outside::hold : ir::Outside::zero;
  if (data.by != Interpolation::loglog) return ir::append(module, ir::TableRead{id, x, 0, outside});
  const auto constant = [&](double number) { return ir::append(module, ir::Constant{number}); };
  // ln is asked for positive arguments only: below the first knot the table holds or is zero anyway.
  const ValueId positive = ir::append(module, ir::Binary{BinaryOp::max, x, constant(data.x.front())});
  const ValueId logarithm = ir::append(module, ir::Unary{UnaryOp::ln, positive});
  const ValueId read = ir::append(module, ir::TableRead{id, logarithm, 0, ir::Outside::hold});
  const ValueId inside = ir::append(module, ir::Unary{UnaryOp::exp, read});
  if (data.hold_outside) return inside;
  const ValueId below = ir::append(module, ir::Binary{BinaryOp::less, x, constant(data.x.front())}, ir::Type::truth);
  const ValueId above = ir::append(module, ir::Binary{BinaryOp::less, constant(data.x.back()), x}, ir::Type::truth);
  const ValueId out = ir::append(module, ir::Binary{BinaryOp::logical_or, below, above}, ir::Type::truth);
  return ir::append(module, ir::Select{out, constant(0), inside});
}

ValueId lower_node(const Node& node, const Graph& graph, const Slots& slots,
                   const std::vector<ValueId>& values, const std::vector<ir::TableId>& tables,
                   ir::Module& module) {
  const ir::Type type = node.truth ? ir::Type::truth : ir::Type::real;
  if (const auto op = unary(node.op)) return ir::append(module, ir::Unary{*op, values[node.a.row]}, type);
  if (const auto op = binary(node.op)) {
    return ir::append(module, ir::Binary{*op, values[node.a.row], values[node.b.row]}, type);
  }
  if (node.op == NodeOp::constant) return ir::append(module, ir::Constant{node.number}, type);
  if (node.op == NodeOp::parameter) return ir::append(module, ir::Input{slots.parameters + node.index}, type);
  if (node.op == NodeOp::reading) return ir::append(module, ir::Input{slots.readings + node.index}, type);
  if (node.op == NodeOp::observable) return ir::append(module, ir::Input{slots.observables + node.index}, type);
  if (node.op == NodeOp::under) return ir::append(module, ir::Input{slots.under + node.index}, type);
  if (node.op == NodeOp::offsets_on) return ir::append(module, ir::Input{slots.offsets_on}, type);
  if (node.op == NodeOp::s) return ir::append(module, ir::ReadArgument{ir::Argument::s}, type);
  if (node.op == NodeOp::t) return ir::append(module, ir::ReadArgument{ir::Argument::t}, type);
  if (node.op == NodeOp::w) return ir::append(module, ir::ReadArgument{ir::Argument::w}, type);
  if (node.op == NodeOp::table) {
    return read_table(graph.tables[node.index], tables[node.index], values[node.a.row], module);
  }
  TARN_CHECK(node.op == NodeOp::select);
  return ir::append(module, ir::Select{values[node.a.row], values[node.b.row], values[node.c.row]}, type);
}

}  // namespace

std::vector<ir::ValueId> lower_nodes(const Graph& graph, const Slots& slots, ir::Module& module) {
  std::vector<ir::TableId> tables;
  for (const TableData& data : graph.tables) {
    tables.push_back(ir::TableId{static_cast<std::uint32_t>(module.tables.size())});
    module.tables.push_back(to_table(data));
  }
  std::vector<ValueId> values;
  values.reserve(graph.nodes.size());
  for (const Node& node : graph.nodes) values.push_back(lower_node(node, graph, slots, values, tables, module));
  return values;
}

std::uint32_t Rows::row(ir::ValueId value, const std::string& name) {
  auto& functions = module_.sets[set_].functions;
  const auto [found, is_new] = rows_.try_emplace(value, static_cast<std::uint32_t>(functions.size()));
  if (is_new) functions.push_back({name, value});
  return found->second;
}

}  // namespace tarn::compiler
