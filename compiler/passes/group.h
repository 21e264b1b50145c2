#pragma once
/// \file Writes each generator with as few groups and words as it has different ones.

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Coefficients that are constant multiples of one value become one group, the multiples going
/// into the factors (a coefficient that is constant becomes 1); equal words are merged, zero terms
/// and empty groups dropped; groups stand by coefficient, terms by word. Rows of set 0 keep their
/// place; where a common value has no row yet, one is appended. Sets must not have derivatives yet.
///
///     %2 = mul %1 %0        # B/2         function "b" %1         (appended)
///     function "half b" %2                generator "H" bits 1
///     function "-b" %3      # -B          group 2                 # b
///     generator "H" bits 1       becomes  term -0.5 0 x 0 z 1
///     group 0
///     term 1 0 x 0 z 1
///     group 1
///     term 1 0 x 0 z 1
ir::Module group(const ir::Module& module);

}  // namespace tarn::compiler
