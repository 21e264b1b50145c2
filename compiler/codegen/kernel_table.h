#pragma once
/// \file A whole kernel: every entry of a module and the table that lists them.

#include "compiler/codegen/unit.h"
#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Emits all function sets and generators and `tarn_kernel_table`. Precondition: verify() is empty.
void emit_kernel(Unit& unit, const ir::Module& module);

}  // namespace tarn::compiler
