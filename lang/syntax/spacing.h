#pragma once
/// \file Where a tidy text has a space between two tokens of one line.

#include <vector>

#include "lang/syntax/nodes.h"

namespace tarn {

/// What the grammar made of each token, as far as spaces depend on it.
struct Roles {
  std::vector<bool> name;    ///< A name: an opening bracket after it is a call or an index.
  std::vector<bool> sign;    ///< A minus that stands for the sign of what follows.
  std::vector<bool> tight;   ///< Inside an index or the bounds of a loop: `n-1`, not `n - 1`.
  std::vector<bool> unit;    ///< Inside the brackets of a unit.
};

Roles roles_of(const Tokens& tokens, const std::vector<SyntaxNode>& nodes);

/// Precondition: i > 0. Whether a space stands between tokens i-1 and i.
bool space_before(std::size_t i, const Tokens& tokens, const Roles& roles);

}  // namespace tarn
