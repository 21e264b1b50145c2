#pragma once
/// \file The rules a Module keeps. A broken one is a bug of whoever made it, never of the user.

#include <string>
#include <vector>

#include "compiler/ir/module.h"

namespace tarn::ir {

/// Broken rules, one sentence each; empty when sound.
///
/// Operands precede their uses and have the type the operation asks for; inputs, tables and
/// functions named exist; table columns have one entry a piece and knots increase; a set has no
/// derivatives or one for each function; words fit the generator's bits; no two groups of a
/// generator share a coefficient; set 0 exists where a generator does.
std::vector<std::string> verify(const Module& module);

}  // namespace tarn::ir
