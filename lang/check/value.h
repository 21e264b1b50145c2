#pragma once
/// \file What an expression can be worth while a program is checked.

#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "lang/program/instance.h"
#include "lang/syntax/ast.h"

namespace tarn {

struct Value;

/// Stands for an error already reported, or for an argument that is checked where it is used:
/// whatever is made of it is unknown too, without a message.
struct Unknown {};

/// A number of some dimension.
struct NumberValue {
  NodeId node;
};

struct TruthValue {
  NodeId node;
};

/// An integer. Of a law or part checked by itself it is not known and stands as a node.
struct CountValue {
  std::optional<std::int64_t> value;
  NodeId node{};
};

/// `verdict`, or one of within, marginal, outside: a number that is only compared.
struct VerdictValue {
  NodeId node;
};

/// A text; nothing if it inserts a count that is not known.
struct TextValue {
  std::optional<std::string> text;
};

/// A sum of Pauli words; all coefficients have `dimension` (energies and angular rates mixed
/// count as a frequency).
struct OperatorValue {
  Operator terms;
  Dimension dimension;
};

struct ListValue {
  std::shared_ptr<const std::vector<Value>> items;
};

/// rows("edges.csv"): columns in the order of the file.
struct RowsValue {
  std::vector<std::string> names;
  std::shared_ptr<const std::vector<std::vector<Value>>> rows;
};

/// A value given to an argument, and where.
struct BoundValue {
  std::shared_ptr<const Value> value;
  Span span;
};

enum class CallableKind : std::uint8_t { schedule, spectrum, psd, function, bath, qubit, coupler, chip };

/// A declaration that takes arguments, with some of them bound.
struct Callable {
  CallableKind kind = CallableKind::function;
  std::uint32_t module = 0;
  const ast::Item* item = nullptr;
  std::map<std::string, BoundValue> bound;
  bool misnamed = false;  ///< A value was given under a name that no argument has, which was reported.
};

struct Value {
  std::variant<Unknown, NumberValue, TruthValue, CountValue, VerdictValue, TextValue, OperatorValue, ListValue, RowsValue,
               Callable>
      is;

  template <class T>
  const T* get() const {
    return std::get_if<T>(&is);
  }
  bool unknown() const { return std::holds_alternative<Unknown>(is); }
};

/// For messages: a number, a count, an operator, a qubit kind.
std::string describe(const Value& value);
std::string describe(CallableKind kind);

}  // namespace tarn
