#include "compiler/passes/evaluate.h"

#include <cmath>

namespace tarn::compiler {

using ir::BinaryOp;
using ir::UnaryOp;

double evaluate(UnaryOp op, double x) {
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
    case UnaryOp::abs: return std::fabs(x);
    case UnaryOp::floor: return std::floor(x);
    case UnaryOp::logical_not: return x == 0 ? 1 : 0;
  }
  return 0;
}

double evaluate(BinaryOp op, double x, double y) {
  switch (op) {
    case BinaryOp::add: return x + y;
    case BinaryOp::sub: return x - y;
    case BinaryOp::mul: return x * y;
    case BinaryOp::div: return x / y;
    case BinaryOp::pow: return std::pow(x, y);
    case BinaryOp::mod: return x - y * std::floor(x / y);
    case BinaryOp::min: return std::isnan(x) || x < y ? x : y;
    case BinaryOp::max: return std::isnan(x) || x > y ? x : y;
    case BinaryOp::less: return x < y;
    case BinaryOp::less_equal: return x <= y;
    case BinaryOp::equal: return x == y;
    case BinaryOp::not_equal: return x != y;
    case BinaryOp::logical_and: return x != 0 && y != 0;
    case BinaryOp::logical_or: return x != 0 || y != 0;
  }
  return 0;
}

}  // namespace tarn::compiler
