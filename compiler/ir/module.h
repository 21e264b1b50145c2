#pragma once
/// \file Typed IR: what lowering writes, passes rewrite and code generation reads.
/// All numbers are in internal units (ns, rad, hbar = 1). Text form: text.h; rules: verify.h.

#include <cstdint>
#include <string>
#include <variant>
#include <vector>

#include "runtime/plan/operators.h"

namespace tarn::ir {

/// Row of one Module table. The tag keeps ids of different tables apart.
template <class Tag>
struct Id {
  std::uint32_t row = 0;
  bool operator==(const Id&) const = default;
  auto operator<=>(const Id&) const = default;
};
using ValueId = Id<struct ValueTag>;
using TableId = Id<struct TableTag>;

enum class Type : std::uint8_t { real, truth };

/// What a function is evaluated at: s of the pace, laboratory time t [ns], angular rate w [rad/ns].
enum class Argument : std::uint8_t { s, t, w };

enum class UnaryOp : std::uint8_t {
  neg, exp, ln, log10, sqrt, sin, cos, tan, asin, acos, atan, sinh, cosh, tanh, abs, floor, logical_not
};
/// mod has the sign of the divisor: x - y floor(x/y). Comparisons and logic give truths.
enum class BinaryOp : std::uint8_t {
  add, sub, mul, div, pow, mod, min, max, less, less_equal, equal, not_equal, logical_and, logical_or
};
/// What a table gives outside its knots.
enum class Outside : std::uint8_t { hold, zero };

// One struct per operation. Adding one breaks every std::visit that does not handle it yet.
struct Constant {
  double value;  ///< A truth is 0 or 1.
  bool operator==(const Constant&) const = default;
};
struct Input {
  std::uint32_t slot;  ///< Position in the kernel's input block.
  bool operator==(const Input&) const = default;
};
struct ReadArgument {
  Argument argument;
  bool operator==(const ReadArgument&) const = default;
};
struct Unary {
  UnaryOp op;
  ValueId operand;
  bool operator==(const Unary&) const = default;
};
struct Binary {
  BinaryOp op;
  ValueId lhs, rhs;
  bool operator==(const Binary&) const = default;
};
struct Select {
  ValueId condition, then_value, else_value;
  bool operator==(const Select&) const = default;
};
/// Derivative of the given order (0 to 3) of a piecewise cubic; zero outside for order > 0.
struct TableRead {
  TableId table;
  ValueId x;
  std::uint8_t order = 0;
  Outside outside = Outside::hold;
  bool operator==(const TableRead&) const = default;
};
using Op = std::variant<Constant, Input, ReadArgument, Unary, Binary, Select, TableRead>;

struct Value {
  Op op;
  Type type = Type::real;
  bool operator==(const Value&) const = default;
};

/// Piecewise cubic with pieces() pieces: c[k][j] is the coefficient of (x - knots[j])^k on piece j.
/// The numbers are inputs of the kernel, not part of its code: only the number of pieces shapes it.
struct Table {
  std::string name;
  std::vector<double> knots;
  std::vector<double> c[4];
  std::size_t pieces() const { return knots.empty() ? 0 : knots.size() - 1; }
  bool operator==(const Table&) const = default;
};

struct Function {
  std::string name;
  ValueId value;
  bool operator==(const Function&) const = default;
};

/// Functions evaluated together, sharing their subexpressions: one kernel entry.
struct FunctionSet {
  std::string name;
  std::vector<Function> functions;
  bool differentiate = false;           ///< Wants d/ds of each function as well.
  std::vector<ValueId> derivatives;     ///< Filled by the differentiation pass, one per function.
  bool operator==(const FunctionSet&) const = default;
};

/// What passes found out about a generator, for people and for the choice of an equation.
/// Code generation decides word by word and does not depend on it.
struct Structure {
  bool real_words = false;     ///< Every matrix element is real.
  bool imaginary = false;      ///< Every matrix element is imaginary: -i times a real generator.
  bool diagonal = false;       ///< No word flips a bit.
  bool operator==(const Structure&) const = default;
};

/// G = sum over groups of (function `coefficient` of set 0)(s, t) times its words, acting on
/// 2^bits amplitudes. Hamiltonians act on n bits; Liouvillians on 2n: the row index of the
/// density matrix in the upper n bits, its column index in the lower n.
struct Generator {
  std::string name;
  std::uint32_t bits = 0;
  runtime::OperatorSum sum;
  Structure structure;
  bool lanes = false;  ///< Compile lane entries too (small systems).
};

/// One model with its counts fixed. A plain value: passes take it and return it.
struct Module {
  std::string name;
  std::vector<std::string> inputs;  ///< Names of the input slots.
  std::vector<Table> tables;
  std::vector<Value> values;        ///< Operands precede their uses.
  std::vector<FunctionSet> sets;    ///< Set 0 holds the coefficients of all operators.
  std::vector<Generator> generators;
};

/// Appends a value; its operands must exist already.
ValueId append(Module& module, Op op, Type type = Type::real);

/// Calls visit(ValueId&) for each operand of the operation, in the order written.
template <class Operation, class Visit>
void for_each_operand(Operation& operation, Visit&& visit) {
  std::visit(
      [&](auto& op) {
        if constexpr (requires { op.operand; }) visit(op.operand);
        if constexpr (requires { op.lhs; }) visit(op.lhs), visit(op.rhs);
        if constexpr (requires { op.condition; }) visit(op.condition), visit(op.then_value), visit(op.else_value);
        if constexpr (requires { op.x; }) visit(op.x);
      },
      operation);
}

}  // namespace tarn::ir
