#pragma once
/// \file An instance made ready to run: plan, optimised module, kernel and its tables.

#include <string>
#include <vector>

#include "compiler/ir/module.h"
#include "compiler/jit/engine.h"
#include "compiler/lower/lower.h"
#include "lang/support/result.h"
#include "runtime/kernel/input_block.h"
#include "runtime/kernel/kernel.h"

namespace tarn::compiler {

struct Prepared {
  runtime::Plan plan;
  ir::Module module;  ///< Optimised.
  runtime::Kernel kernel;
  std::vector<runtime::TableNumbers> tables;
};

/// Lowers and optimises without compiling.
Lowered lower_optimized(const Instance& instance, const SourceSet& sources);

/// Lowers, optimises and compiles, or finds the kernel in the cache.
Result<Prepared, CompileError> prepare(const Instance& instance, const SourceSet& sources,
                                       const EngineOptions& options, EngineReport& report);

}  // namespace tarn::compiler
