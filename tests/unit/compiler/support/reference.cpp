#include "tests/unit/compiler/support/reference.h"

#include <cmath>

namespace tarn::test {

using namespace ir;

namespace {

double apply_unary(UnaryOp op, double x) {
  switch (op) {
    case UnaryOp::neg: return -x;
    case UnaryOp::exp: return std::exp(x);
    case UnaryOp::ln: return std::log(x);
    case UnaryOp::log10: return std::log10(x);
    case UnaryOp::sqrt: return std::sqrt(x);
    case UnaryOp::sin: return std::sin(x);
    case UnaryOp::cos: return std::cos(x);
    case UnaryOp::tan: return std::tan(x);
    case UnaryOp::asin: return std::asin(x);
    case UnaryOp::acos: return std::acos(x);
    case UnaryOp::atan: return std::atan(x);
    case UnaryOp::sinh: return std::sinh(x);
    case UnaryOp::cosh: return std::cosh(x);
    case UnaryOp::tanh: return std::tanh(x);
    case UnaryOp::abs: return std::abs(x);
    case UnaryOp::floor: return std::floor(x);
    case UnaryOp::logical_not: return x != 0 ? 0 : 1;
  }
  return NAN;
}

double apply_binary(BinaryOp op, double x, double y) {
  switch (op) {
    case BinaryOp::add: return x + y;
    case BinaryOp::sub: return x - y;
    case BinaryOp::mul: return x * y;
    case BinaryOp::div: return x / y;
    case BinaryOp::pow: return std::pow(x, y);
    case BinaryOp::mod: return x - y * std::floor(x / y);
    case BinaryOp::min: return std::isnan(x) || std::isnan(y) ? NAN : std::min(x, y);
    case BinaryOp::max: return std::isnan(x) || std::isnan(y) ? NAN : std::max(x, y);
    case BinaryOp::less: return x < y;
    case BinaryOp::less_equal: return x <= y;
    case BinaryOp::equal: return x == y;
    case BinaryOp::not_equal: return x != y;
    case BinaryOp::logical_and: return x * y;
    case BinaryOp::logical_or: return std::max(x, y);
  }
  return NAN;
}

double read(const Table& table, double x, int order, Outside outside) {
  const std::size_t last = table.pieces();
  const bool out = x < table.knots[0] || x > table.knots[last];
  if (out && (order > 0 || outside == Outside::zero)) return 0;
  x = std::min(std::max(x, table.knots[0]), table.knots[last]);
  std::size_t j = 0;
  while (j + 1 < last && table.knots[j + 1] <= x) ++j;
  const double d = x - table.knots[j];
  const double c1 = table.c[1][j], c2 = table.c[2][j], c3 = table.c[3][j];
  switch (order) {
    case 0: return table.c[0][j] + c1 * d + c2 * d * d + c3 * d * d * d;
    case 1: return c1 + 2 * c2 * d + 3 * c3 * d * d;
    case 2: return 2 * c2 + 6 * c3 * d;
    default: return 6 * c3;
  }
}

}  // namespace

std::vector<double> interpret(const Module& module, std::span<const double> inputs, Point point) {
  std::vector<double> value;
  for (const Value& row : module.values) {
    const auto at = [&](ValueId id) { return value[id.row]; };
    double result = NAN;
    if (const auto* constant = std::get_if<Constant>(&row.op)) result = constant->value;
    if (const auto* input = std::get_if<Input>(&row.op)) result = inputs[input->slot];
    if (const auto* argument = std::get_if<ReadArgument>(&row.op))
      result = argument->argument == Argument::s ? point.s : argument->argument == Argument::t ? point.t : point.w;
    if (const auto* unary = std::get_if<Unary>(&row.op)) result = apply_unary(unary->op, at(unary->operand));
    if (const auto* binary = std::get_if<Binary>(&row.op)) result = apply_binary(binary->op, at(binary->lhs), at(binary->rhs));
    if (const auto* select = std::get_if<Select>(&row.op))
      result = at(select->condition) != 0 ? at(select->then_value) : at(select->else_value);
    if (const auto* table = std::get_if<TableRead>(&row.op))
      result = read(module.tables[table->table.row], at(table->x), table->order, table->outside);
    value.push_back(result);
  }
  return value;
}

std::vector<runtime::TableNumbers> numbers_of(const Module& module) {
  std::vector<runtime::TableNumbers> numbers;
  for (const Table& table : module.tables) {
    runtime::TableNumbers one;
    one.knots = table.knots;
    for (std::size_t k = 0; k < 4; ++k) one.c[k] = table.c[k];
    numbers.push_back(std::move(one));
  }
  return numbers;
}

}  // namespace tarn::test
