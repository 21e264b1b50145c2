#pragma once
/// \file From an optimised Module to a kernel that runs: through the cache if it was compiled before.

#include <string>
#include <vector>

#include "compiler/ir/module.h"
#include "lang/support/result.h"
#include "runtime/kernel/kernel.h"

namespace tarn::compiler {

struct EngineOptions {
  bool cache = true;            ///< Look in the cache and store there; else only this process.
  std::string cache_directory;  ///< Empty: default_cache_directory().
  std::string plugin;           ///< Path of libtarn_codegen.so; empty: find_plugin().
  bool link = true;             ///< Use the system's `ld` where there is one.
  std::uint32_t lanes = 0;      ///< 2, 4 or 8 lanes; 0, or more than there are: the processor's own.
};

/// What happened, added up over calls. `remarks` say why the cache was not used as asked.
struct EngineReport {
  std::uint32_t compiled = 0;
  std::uint32_t cache_hits = 0;
  std::uint32_t replaced = 0;  ///< Entries that were damaged or foreign.
  double seconds = 0;          ///< Wall time of all calls.
  std::vector<std::string> remarks;
};

/// Why there is no kernel: no code generator beside the executable, or one that failed.
struct CompileError {
  std::string message;
};

/// The kernel of an optimised Module. Numbers of tables do not matter, only their pieces.
///
/// A kernel in the cache costs no LLVM: key = SHA-256 of the module's text, the code generator's
/// build id, the pipeline's name and the processor. Two processes may fill one entry at once.
/// A cache that cannot be used is a remark, never an error. Precondition: verify() finds nothing.
Result<runtime::Kernel, CompileError> compile(const ir::Module& module, const EngineOptions& options = {},
                                              EngineReport* report = nullptr);

/// 16 hexadecimal digits that are others for another build of this program or of the code generator:
/// the bits of answers depend on both. Parts that cannot be read count as empty.
std::string program_build();

enum class Product { llvm, assembly, object };

/// What the code generator makes of a Module: LLVM IR or assembly as text, or an ELF object.
Result<std::string, CompileError> generate(const ir::Module& module, Product product, const EngineOptions& options = {});

/// Links an object of generate() into a shared object that exports tarn_kernel_table.
/// Errors: there is no `ld`, or it failed.
Result<Done, CompileError> link_kernel(const std::string& object_path, const std::string& shared_object_path);

}  // namespace tarn::compiler
