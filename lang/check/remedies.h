#pragma once
/// \file What would mend a dimension that does not fit, or a word that is not known.

#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "lang/check/session.h"

namespace tarn {

/// What to multiply a quantity of dimension `found` by to get `expected`: "multiply by `kB`".
std::string factor_remedy(Dimension expected, Dimension found);

/// How a plain number written at `span` gets the unit it lacks; empty if a name or a number is not
/// all that is written there.
std::string unit_remedy(const Session& session, Span span, Dimension expected);

/// The span of the first factor of a product written without brackets: `5` of `5*X`.
Span first_factor(const Session& session, Span span);

/// Of what is written at `span`: the unit that a plain number lacks, `2*s` for `2 s`, else factor_remedy.
std::string dimension_remedy(const Session& session, Span span, Dimension expected, Dimension found);

/// The same for a sum or product: the unit is asked of the first factor that can take one.
std::string dimension_remedy(const Session& session, const Scope& scope, ast::ExprId id, Dimension expected, Dimension found);

/// The unit that a number is written in, a sign before it or not; of any other expression the usual one.
Shown written_unit(const Ast& ast, ast::ExprId id, Dimension dimension);

/// "10 us", "0.2 [1/us]"
std::string in_unit(double value, const Shown& unit);

/// "did you mean `near`?"; where no word is near, what there is: "`spectra` has `ohmic`, `drude`"
/// for `what` = "`spectra` has". Empty if there is nothing.
std::string offer(std::string_view word, const std::vector<std::string>& known, std::string_view what);

/// "did you mean `near`?", where that one is `available`, and all that are, for a word that is none of `words`.
std::string near_and(std::string_view word, std::span<const std::string_view> words, std::string_view available);

/// Words in backticks, joined by commas; at most twelve.
std::string in_list(const std::vector<std::string>& words);

/// Bits that were written as a number, as the text that `form` puts them in, "begin state(\"{}\")"; where they
/// are not as many as the qubits, what a state has.
std::string letters_remedy(std::string_view form, std::string_view bits, std::size_t qubits);

/// "1 qubit", "3 qubits"
std::string counted(std::size_t count, std::string_view noun);

/// The indices that a sequence of `count` items has: "`0 .. 3`".
std::string index_range(std::int64_t count);

/// The operands of a product, the divisors of a quotient among them.
struct Factor {
  ast::ExprId id;
  bool divides = false;
};
std::vector<Factor> factors_of(const Ast& ast, ast::ExprId product);

}  // namespace tarn
