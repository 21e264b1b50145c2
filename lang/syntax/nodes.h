#pragma once
/// \file What the grammar recognised, before it becomes a tree: nodes over tokens in
/// postorder (operands first), and where it failed.

#include <cstdint>
#include <string_view>
#include <vector>

#include "lang/syntax/tokens.h"

namespace tarn {

/// The constructs of the grammar that the tree is built from.
enum class Tag : std::uint8_t {
  // declarations
  use_item, parameter, let, law, bath, kind, chip, experiment,
  arg, args, type, range, spread,
  bath_value, bath_band, energy, jump, noise, shared, operators, correlation, loop, where,
  qubit_place, chip_place, coupler_place, offset,
  // statements
  chip_use, begin, pace, equation, each, choice, levels, draws, observe, scan, sweep, together, axis, data, compare,
  fit, fit_each, expect, tolerance,
  start_piece, ramp_piece, hold_piece, step_piece, follow_piece,
  value, unit_in, seed, at_end, at_point, first, last, along,
  // expressions
  choice_expr, either, both, negation, comparison, sum, product, sign, power, paren,
  number, text, ketbra, use, path, step, call, given, given_name, held, under, bracket, unit, name, op,
};

struct SyntaxNode {
  Tag tag;
  std::uint32_t begin;  ///< First token.
  std::uint32_t end;    ///< One past the last token.
  std::uint32_t size;   ///< Nodes of its subtree, itself included; they end with it.
};

/// Where recognition of a statement stopped and what would have been read there.
struct Failure {
  std::uint32_t token = 0;
  std::vector<std::string_view> expected;  ///< In the user's words, in grammar order.
};

/// A block whose `}` is missing.
struct OpenBlock {
  std::uint32_t open;   ///< The token `{`.
  std::uint32_t token;  ///< Where `}` was expected.
};

struct Recognised {
  std::vector<SyntaxNode> nodes;
  std::vector<Failure> failures;
  std::vector<OpenBlock> open_blocks;
};

/// Applies the grammar. Statements that do not match are skipped up to the next word
/// that starts one; each leaves a Failure. Time is linear in the number of tokens.
Recognised recognise(const Tokens& tokens);

}  // namespace tarn
