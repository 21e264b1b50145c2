#pragma once
/// \file Computes equal values once and drops what nobody reads.

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Operands of commutative operations are put in order first, so that x+y and y+x are one value.
///
///     %0 = argument s                          %0 = argument s
///     %1 = exp %0                              %1 = exp %0
///     %2 = argument s               becomes    %2 = mul %1 %1
///     %3 = exp %2                              function "f" %2
///     %4 = mul %1 %3
///     %5 = sin %0
///     function "f" %4
ir::Module share(const ir::Module& module);

}  // namespace tarn::compiler
