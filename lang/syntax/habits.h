#pragma once
/// \file Words of other notations, and what the language has for them.

#include <string_view>

namespace tarn {

/// The word of a statement or piece that `word` is written for: `hold` for `pause`. Empty if unknown.
std::string_view statement_for(std::string_view word);

/// What to write for a name of another notation: "`X`" for sx, "`ln` or `log10`" for log. Empty if unknown.
std::string_view value_for(std::string_view word);

}  // namespace tarn
