#pragma once
/// \file The C header of a compiled model, for programs in other languages.

#include <string>

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// A self-contained C99 header: the kernel's interface, the numbers of the model's tables, and an
/// enumerator for each input, set, row and generator. Letters and digits of a name stay, all else
/// becomes `_`; names that then coincide get a number. The original name stands beside each.
std::string c_header(const ir::Module& module);

}  // namespace tarn::compiler
