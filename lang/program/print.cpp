#include "lang/program/print.h"

#include <fmt/format.h>

#include <array>

#include "lang/program/operators.h"

namespace tarn {
namespace {

constexpr int kAtom = 100;

struct Written {
  std::string text;
  int precedence = kAtom;
};

constexpr std::array kFunctionNames = std::to_array<std::string_view>(
    {"-", "exp", "ln", "log10", "sqrt", "sin", "cos", "tan", "asin", "acos", "atan", "sinh", "cosh", "tanh", "abs",
     "floor", "not"});

struct Infix {
  std::string_view symbol;
  int precedence;
};
constexpr std::array kInfix = std::to_array<Infix>({{" + ", 5}, {" - ", 5}, {"*", 6}, {"/", 6}, {"^", 8}, {"mod", 0},
                                                    {"min", 0}, {"max", 0}, {" < ", 4}, {" <= ", 4}, {" == ", 4},
                                                    {" != ", 4}, {" and ", 3}, {" or ", 2}});

std::string bracketed(const Written& part, int least) {
  return part.precedence < least ? "(" + part.text + ")" : part.text;
}

class Printer {
 public:
  Printer(const Graph& graph, const GraphNames& names) : graph_(graph), names_(names) {}

  Written write(NodeId id) {
    if (++written_ > kMost) return {"..."};
    const Node& node = graph_[id];
    const int operands = operand_count(node.op);
    if (operands == 0) return {leaf(node), node.op == NodeOp::constant && node.number < 0 ? 7 : kAtom};
    if (node.op == NodeOp::table) return {fmt::format("table {}({})", node.index, write(node.a).text)};
    if (operands == 1) return unary(node);
    if (operands == 2) return binary(node);
    return {fmt::format("if {} then {} else {}", write(node.a).text, write(node.b).text, write(node.c).text), 1};
  }

 private:
  std::string leaf(const Node& node) const {
    if (node.op == NodeOp::constant) {
      if (node.truth) return node.number != 0 ? "true" : "false";
      return fmt::format("{}", node.number);
    }
    if (node.op == NodeOp::parameter) return names_.parameter(node.index);
    if (node.op == NodeOp::s) return "s";
    if (node.op == NodeOp::t) return "t";
    if (node.op == NodeOp::w) return "w";
    if (node.op == NodeOp::reading) return fmt::format("reading {}", node.index);
    if (node.op == NodeOp::observable) return fmt::format("observable {}", node.index);
    if (node.op == NodeOp::under) return fmt::format("under {}", node.index);
    return "offsets_on";
  }

  Written unary(const Node& node) {
    const Written operand = write(node.a);
    const std::string_view name = kFunctionNames.at(distance(NodeOp::neg, node.op));
    if (node.op == NodeOp::neg) return {"-" + bracketed(operand, 7), 7};
    return {fmt::format("{}({})", name, operand.text)};
  }

  Written binary(const Node& node) {
    const Written left = write(node.a);
    const Written right = write(node.b);
    const Infix& infix = kInfix.at(distance(NodeOp::add, node.op));
    if (infix.precedence == 0) return {fmt::format("{}({}, {})", infix.symbol, left.text, right.text)};
    const bool power = node.op == NodeOp::pow;
    return {bracketed(left, infix.precedence + (power ? 1 : 0)) + std::string(infix.symbol) +
                bracketed(right, infix.precedence + (power ? 0 : 1)),
            infix.precedence};
  }

  static constexpr std::size_t kMost = 2000;  ///< A shared graph can be far longer as text.
  const Graph& graph_;
  const GraphNames& names_;
  std::size_t written_ = 0;
};

std::string factor_text(std::complex<double> factor) {
  if (factor.imag() == 0) return fmt::format("{}", factor.real());
  if (factor.real() == 0) return fmt::format("{}i", factor.imag());
  return fmt::format("({}{:+}i)", factor.real(), factor.imag());
}

std::string word_text(Word word, std::uint32_t qubits) {
  std::string word_letters, places;
  for (std::uint32_t q = 0; q < qubits; ++q) {
    const std::uint64_t bit = std::uint64_t{1} << (qubits - 1 - q);
    const bool x = (word.x & bit) != 0;
    const bool z = (word.z & bit) != 0;
    if (!x && !z) continue;
    word_letters += x ? (z ? 'Y' : 'X') : 'Z';
    places += fmt::format("{}{}", places.empty() ? "" : ", ", q);
  }
  return word_letters.empty() ? "I" : fmt::format("{}({})", word_letters, places);
}

}  // namespace

std::string to_text(const Graph& graph, NodeId id, const GraphNames& names) { return Printer(graph, names).write(id).text; }

std::string to_text(const Graph& graph, const Operator& op, std::uint32_t qubits, const GraphNames& names) {
  std::string result;
  for (const OperatorTerm& term : op) {
    if (!result.empty()) result += " + ";
    result += factor_text(term.factor);
    const Node& coefficient = graph[term.coefficient];
    const bool one = coefficient.op == NodeOp::constant && coefficient.number == 1;
    if (!one) result += " * (" + to_text(graph, term.coefficient, names) + ")";
    result += " " + word_text(term.word, qubits);
  }
  return result.empty() ? "0" : result;
}

}  // namespace tarn
