#pragma once
/// \file A main file with all it uses: modules, tables, and the folder they may be in.

#include <filesystem>
#include <map>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/library.h"
#include "lang/source/sandbox.h"
#include "lang/source/source_set.h"
#include "lang/source/table_file.h"
#include "lang/syntax/ast.h"

namespace tarn {

using ModuleId = Id<struct ModuleTag>;

struct LoadOptions {
  std::span<const LibraryText> library;          ///< Usually standard_library().
  std::vector<std::filesystem::path> also_read;  ///< Further folders a model may read.
};

/// What a `use` gave a name to.
struct Import {
  std::string name;
  Span span;  ///< Of the `use`.
  ModuleId module;
};

struct Module {
  Ast ast;
  std::filesystem::path path;  ///< With links resolved; empty for a text of the library.
  bool library = false;
  std::vector<Import> imports;  ///< Uses that failed are missing and were reported.
};

/// Everything read in one run. The main file is module 0; a file used twice is one module.
struct Modules {
  SourceSet sources;  ///< Models, library texts and tables, in the order they were read.
  std::vector<Module> modules;
  Sandbox sandbox;
  std::map<std::filesystem::path, std::optional<Table>> tables;  ///< Nothing: failed before.

  const Module& module(ModuleId id) const { return modules[id.row]; }
};

/// Largest files that are read.
inline constexpr std::size_t kLargestModel = std::size_t{4} << 20U;
inline constexpr std::size_t kLargestTable = std::size_t{16} << 20U;

/// Reads and parses the main file and, through `use`, all others. Errors at a `use`: no
/// such file, outside the allowed folders, unreadable, no file, too large, cyclic, no such
/// text of the library. If the main file cannot be read the result has one empty module.
Modules load_modules(const std::filesystem::path& main_file, const LoadOptions& options, Diagnostics& diagnostics);

/// The same for a main text that is in no file; its folder is `folder`.
Modules load_text(std::string name, std::string text, const std::filesystem::path& folder, const LoadOptions& options,
                  Diagnostics& diagnostics);

/// The table `path` as named in the file of `asked`; each file is read once. Null after a
/// report. The pointer stays valid while `modules` lives.
const Table* open_table(Modules& modules, std::string_view path, Span asked, Diagnostics& diagnostics);

}  // namespace tarn
