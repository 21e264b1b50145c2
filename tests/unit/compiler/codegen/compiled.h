#pragma once
/// \file Compiles a module for a test, in memory and without the cache.

#include <catch2/catch.hpp>

#include "compiler/jit/engine.h"

namespace tarn::test {

/// Fails the test with the compiler's message if there is no kernel.
inline runtime::Kernel compiled(const ir::Module& module, std::uint32_t lanes = 0) {
  compiler::EngineOptions options;
  options.cache = false;
  options.lanes = lanes;
  auto kernel = compiler::compile(module, options);
  if (!kernel) FAIL(kernel.error().message);
  return *kernel;
}

}  // namespace tarn::test
