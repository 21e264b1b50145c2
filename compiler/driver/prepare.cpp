#include "compiler/driver/prepare.h"

#include <utility>

#include "compiler/passes/pipeline.h"

namespace tarn::compiler {
namespace {

std::vector<runtime::TableNumbers> numbers_of(const std::vector<ir::Table>& tables) {
  std::vector<runtime::TableNumbers> numbers;
  for (const ir::Table& table : tables) {
    numbers.push_back({table.knots, {table.c[0], table.c[1], table.c[2], table.c[3]}});
  }
  return numbers;
}

}  // namespace

Lowered lower_optimized(const Instance& instance, const SourceSet& sources) {
  Lowered lowered = lower(instance, sources);
  lowered.module = optimize(lowered.module);
  return lowered;
}

Result<Prepared, CompileError> prepare(const Instance& instance, const SourceSet& sources,
                                       const EngineOptions& options, EngineReport& report) {
  Lowered lowered = lower_optimized(instance, sources);
  auto kernel = compile(lowered.module, options, &report);
  if (!kernel) return Unexpected{kernel.error()};
  auto tables = numbers_of(lowered.module.tables);
  return Prepared{std::move(lowered.plan), std::move(lowered.module), *kernel, std::move(tables)};
}

}  // namespace tarn::compiler
