#include "compiler/jit/engine.h"

#include <unistd.h>

#include <chrono>
#include <optional>

#include "compiler/ir/text.h"
#include "compiler/jit/digest.h"
#include "compiler/jit/host.h"
#include "compiler/jit/linker.h"
#include "compiler/jit/object_cache.h"
#include "compiler/jit/plugin.h"
#include "compiler/passes/pipeline.h"

namespace tarn::compiler {

using runtime::Kernel;

namespace {

using KernelOrError = Result<Kernel, CompileError>;

Unexpected<CompileError> error(std::string message) { return Unexpected{CompileError{std::move(message)}}; }

Result<std::string, CompileError> plugin_path(const EngineOptions& options) {
  if (!options.plugin.empty()) return options.plugin;
  if (auto found = find_plugin()) return *found;
  return error("the code generator libtarn_codegen.so is not where it was installed, in lib beside this program");
}

std::string canonical_text(const ir::Module& module) { return ir::to_text(ir::shape_only(module)); }

/// What the compiled bytes depend on, each part with its length in front.
Digest make_key(std::string_view text, std::string_view build, std::uint32_t lanes) {
  const std::vector<std::uint32_t> words = processor_words();
  const std::string_view processor(reinterpret_cast<const char*>(words.data()), words.size() * sizeof words[0]);
  std::string bytes = "tarn kernel 1\n" + std::to_string(lanes);
  for (const std::string_view part : {build, kPipelineName, processor, text}) {
    bytes += '\n' + std::to_string(part.size()) + '\n';
    bytes += part;
  }
  return sha256(bytes);
}

class Compilation {
 public:
  Compilation(const EngineOptions& options, EngineReport& report) : options_(options), report_(report) {}

  KernelOrError run(const ir::Module& module) {
    text_ = canonical_text(module);
    auto path = plugin_path(options_);
    if (!path) return error(path.error().message);
    plugin_path_ = *path;
    if (!options_.cache) return load(compile_object());
    const auto build = build_id(plugin_path_);
    if (!build) return error(plugin_path_ + ": is not the code generator");
    key_ = make_key(text_, *build, options_.lanes);
    const auto cache = ObjectCache::open(options_.cache_directory.empty() ? default_cache_directory() : options_.cache_directory);
    if (!cache) {
      report_.remarks.push_back(cache.error().message);
      return load(compile_object());
    }
    if (auto kernel = from_cache(*cache)) return std::move(*kernel);
    return fill(*cache, compile_object());
  }

 private:
  using ObjectOrError = Result<std::string, CompileError>;

  ObjectOrError compile_object() {
    ++report_.compiled;
    const auto plugin = Plugin::open(plugin_path_);
    if (!plugin) return error(plugin.error().message);
    auto object = plugin->compile(text_, options_.lanes, TARN_CODEGEN_OBJECT);
    if (!object) return error("the code generator failed: " + object.error().message);
    return std::move(*object);
  }

  KernelOrError load(const ObjectOrError& object) {
    if (!object) return error(object.error().message);
    const auto plugin = Plugin::open(plugin_path_);
    if (!plugin) return error(plugin.error().message);
    auto kernel = plugin->load(*object);
    if (!kernel) return error(kernel.error().message);
    return std::move(*kernel);
  }

  void note(const std::string& remark) { report_.remarks.push_back(remark); }

  /// The verified entry, loaded; nothing if there is none that can be used.
  std::optional<Kernel> from_cache(const ObjectCache& cache) {
    for (const EntryKind kind : {EntryKind::shared_object, EntryKind::object}) {
      const auto entry = cache.find(key_, kind);
      if (!entry) {
        note(entry.error().message);
        ++report_.replaced;
      } else if (entry->has_value()) {
        if (auto kernel = open_entry(**entry, kind)) return kernel;
      }
    }
    return std::nullopt;
  }

  std::optional<Kernel> open_entry(const Entry& entry, EntryKind kind) {
    std::optional<Kernel> kernel;
    if (kind == EntryKind::shared_object) {
      auto opened = Kernel::open(entry.path);
      if (opened) kernel = *opened;
      else note(opened.error().message);
    } else {
      auto loaded = load(entry.bytes);
      if (loaded) kernel = *loaded;
      else note(loaded.error().message);
    }
    ++(kernel ? report_.cache_hits : report_.replaced);
    return kernel;
  }

  KernelOrError fill(const ObjectCache& cache, const ObjectOrError& object) {
    if (!object) return error(object.error().message);
    const std::string temporary = cache.temporary_name(key_);
    if (!write_private_file(temporary, *object)) {
      note(temporary + ": cannot be written; the kernel is not kept");
      return load(object);
    }
    auto kernel = fill_shared(cache, temporary);
    if (!kernel) {
      if (const auto stored = cache.store(temporary, key_, EntryKind::object); !stored) note(stored.error().message);
    }
    ::unlink(temporary.c_str());
    return kernel ? KernelOrError(std::move(*kernel)) : load(object);
  }

  /// Links, stores and opens the shared object; nothing if one of these is not possible here.
  std::optional<Kernel> fill_shared(const ObjectCache& cache, const std::string& object_path) {
    const auto linker = options_.link ? find_linker() : std::nullopt;
    if (!linker) return std::nullopt;
    const std::string shared = object_path + ".so";
    const bool linked = link_shared(*linker, object_path, shared);
    const auto stored = linked ? cache.store(shared, key_, EntryKind::shared_object)
                               : Result<Done, Remark>(Unexpected{Remark{*linker + ": failed; the kernel is linked in memory"}});
    ::unlink(shared.c_str());
    if (!stored) return note(stored.error().message), std::nullopt;
    auto kernel = Kernel::open(cache.path_of(key_, EntryKind::shared_object));
    if (!kernel) return note(kernel.error().message), std::nullopt;
    return std::move(*kernel);
  }

  const EngineOptions& options_;
  EngineReport& report_;
  std::string text_, plugin_path_;
  Digest key_{};
};

}  // namespace

Result<Kernel, CompileError> compile(const ir::Module& module, const EngineOptions& options, EngineReport* report) {
  EngineReport unread;
  EngineReport& kept = report ? *report : unread;
  const auto start = std::chrono::steady_clock::now();
  auto result = Compilation(options, kept).run(module);
  kept.seconds += std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
  return result;
}

std::string program_build() {
  const std::string own = build_id("/proc/self/exe").value_or("");
  const auto plugin = find_plugin();
  const std::string generator = plugin ? build_id(*plugin).value_or("") : "";
  constexpr std::size_t kDigits = 16;
  return to_hex(sha256(own + "\n" + generator)).substr(0, kDigits);
}

Result<std::string, CompileError> generate(const ir::Module& module, Product product, const EngineOptions& options) {
  const auto path = plugin_path(options);
  if (!path) return error(path.error().message);
  const auto plugin = Plugin::open(*path);
  if (!plugin) return error(plugin.error().message);
  const std::uint32_t what = product == Product::llvm       ? TARN_CODEGEN_LLVM
                             : product == Product::assembly ? TARN_CODEGEN_ASSEMBLY
                                                            : TARN_CODEGEN_OBJECT;
  auto made = plugin->compile(canonical_text(module), options.lanes, what);
  if (!made) return error("the code generator failed: " + made.error().message);
  return std::move(*made);
}

Result<Done, CompileError> link_kernel(const std::string& object_path, const std::string& shared_object_path) {
  const auto linker = find_linker();
  if (!linker) return error("there is no `ld` in the folders of PATH");
  if (!link_shared(*linker, object_path, shared_object_path)) return error(*linker + " failed on " + object_path);
  return Done{};
}

}  // namespace tarn::compiler
