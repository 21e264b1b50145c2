#pragma once
/// \file The code generator's plug-in: where it is, which build it is, and its functions.

#include <memory>
#include <optional>
#include <string>
#include <string_view>

#include "compiler/codegen/plugin.h"
#include "lang/support/result.h"
#include "runtime/kernel/kernel.h"

namespace tarn::compiler {

/// The plug-in next to the running executable: lib/ or ../lib of its directory.
std::optional<std::string> find_plugin();

/// The identity of a shared object's contents, read from its GNU build-id note without loading it.
std::optional<std::string> build_id(const std::string& path);

/// What a compilation can deliver, and why it did not.
struct PluginError {
  std::string message;
};

/// The opened plug-in. It stays in the process until the end: code it loaded may outlive this handle.
class Plugin {
 public:
  /// Errors: the file cannot be loaded or lacks a function.
  static Result<Plugin, PluginError> open(const std::string& path);

  /// One product (a TARN_CODEGEN_ constant) of a module's canonical text, for 2, 4 or 8 lanes
  /// or, with 0, as many as the processor has.
  Result<std::string, PluginError> compile(std::string_view text, std::uint32_t lanes, std::uint32_t product) const;

  /// Links an object into the process; the kernel's last copy removes it.
  Result<runtime::Kernel, PluginError> load(std::string_view object) const;

 private:
  tarn_codegen_compile_fn compile_ = nullptr;
  tarn_codegen_load_fn load_ = nullptr;
  tarn_codegen_release_fn release_ = nullptr;
};

}  // namespace tarn::compiler
