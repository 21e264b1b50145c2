#pragma once
/// \file Text to tokens: what the grammar reads. Comments are kept beside them.

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/source_set.h"
#include "lang/syntax/ast.h"

namespace tarn {

/// What a token is, one byte each: the grammar is written over these. Words come
/// first, so that "a name" and "any word" are ranges.
enum class Code : unsigned char {
  word = 1,
  unit_word,  ///< A word that is also spelt like a unit: a name like any other.
#define TARN_SOFT(id, text) id,
#include "lang/syntax/tokens.def"
#define TARN_RESERVED(id, text) id,
#include "lang/syntax/tokens.def"
  number,
  one,  ///< The number written `1`, which may start the unit text `[1/us]`.
  percent,
  text,
  ketbra,
#define TARN_SYMBOL(id, text) id,
#include "lang/syntax/tokens.def"
  unknown,  ///< A character outside the language.
};
inline constexpr Code kFirstName = Code::word;
inline constexpr Code kLastName = Code::with;
inline constexpr Code kFirstReserved = Code::along;
inline constexpr Code kLastReserved = Code::width;

struct Token {
  std::uint32_t begin = 0;
  std::uint32_t end = 0;
};

struct Tokens {
  std::string codes;          ///< A Code for each token.
  std::vector<Token> places;  ///< Where each token stands; as long as `codes`.
  std::vector<ast::Comment> comments;
  bool usable = true;  ///< False: the text cannot be parsed; the reason was reported.

  std::size_t size() const { return places.size(); }
  Code code(std::size_t i) const { return i < codes.size() ? static_cast<Code>(codes[i]) : Code{}; }
};

/// Nestings of brackets, and of `if`, `not`, `-`, `^` in one statement, that are read.
inline constexpr unsigned kMaxDepth = 200;
inline constexpr unsigned kMaxChain = 1000;

/// Tokens of the file. Takes linear time and never recurses.
Tokens tokenize(const SourceFile& file, Diagnostics& diagnostics);

/// The word or symbol of a code as the user writes it; for a class, its name ("a number").
std::string_view spelling(Code code);

bool is_word(Code code);
bool is_reserved(Code code);
/// A number, text, ketbra, word or closing bracket: what an operand may end with.
bool ends_operand(Code code);

}  // namespace tarn
