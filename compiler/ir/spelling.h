#pragma once
/// \file The words of the text form, one for each enumerator. Used by the writer and the reader.

#include <array>
#include <string_view>

#include "compiler/ir/module.h"

namespace tarn::ir {

// The order is that of the enumerators.
inline constexpr std::array<std::string_view, 3> kArgumentWords{"s", "t", "w"};
inline constexpr std::array<std::string_view, 17> kUnaryWords{
    "neg",  "exp",  "ln",   "log10", "sqrt", "sin", "cos",   "tan", "asin",
    "acos", "atan", "sinh", "cosh",  "tanh", "abs", "floor", "not"};
inline constexpr std::array<std::string_view, 14> kBinaryWords{
    "add", "sub", "mul", "div", "pow", "mod", "min", "max", "less", "less_equal", "equal", "not_equal", "and", "or"};
inline constexpr std::array<std::string_view, 2> kOutsideWords{"hold", "zero"};

static_assert(kUnaryWords.size() == static_cast<std::size_t>(UnaryOp::logical_not) + 1);
static_assert(kBinaryWords.size() == static_cast<std::size_t>(BinaryOp::logical_or) + 1);

template <std::size_t N, class Enum>
constexpr std::string_view word_of(const std::array<std::string_view, N>& words, Enum value) {
  return words[static_cast<std::size_t>(value)];
}

}  // namespace tarn::ir
