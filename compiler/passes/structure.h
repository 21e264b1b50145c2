#pragma once
/// \file Finds out whether a generator is real, imaginary or diagonal.

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Fills Structure of each generator from its words; coefficients are real.
///
///     generator "H" bits 1                generator "H" bits 1 imaginary
///     group 0                   becomes   group 0
///     term 0 -1 x 1 z 0                   term 0 -1 x 1 z 0
ir::Module find_structure(ir::Module module);

}  // namespace tarn::compiler
