#pragma once
/// \file Compiled function sets: the values or derivatives of a set at many points, W at a time.

#include "compiler/codegen/unit.h"
#include "compiler/ir/module.h"

namespace tarn::compiler {

enum class Wanted { values, derivatives };

/// Emits a tarn_values_fn. Values that depend on inputs only are computed once a call. Elementary
/// functions come from libmvec (at most 4 ulp), one lane at a time from libm where it has none.
llvm::Function* emit_set(Unit& unit, const ir::Module& module, const ir::FunctionSet& set, Wanted wanted,
                         const std::string& name);

}  // namespace tarn::compiler
