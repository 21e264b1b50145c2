#include "lang/source/loader.h"

#include <algorithm>

#include "lang/support/check.h"
#include "lang/support/near.h"
#include "lang/syntax/parse.h"

namespace tarn {
namespace {

namespace fs = std::filesystem;

constexpr std::size_t kDeepestUse = 100;

/// `looked_for`: the path as seen from the current folder; empty where it is `shown` itself.
void report_file(const FileError& error, std::string_view shown, Span at, Diagnostics& diagnostics, const std::string& looked_for = {}) {
  switch (error.reason) {
    case FileError::Reason::missing: {
      auto tail = diagnostics.report(at, diag::file_missing, shown);
      if (!looked_for.empty()) tail.remedy("looked for as `" + looked_for + "`: a path starts at the folder of the file that names it");
      break;
    }
    case FileError::Reason::outside:
      diagnostics.report(at, diag::file_outside, shown).remedy("move it there, or allow its folder with `--also-read DIR`");
      break;
    case FileError::Reason::unreadable:
      diagnostics.report(at, diag::file_unreadable, shown, error.detail);
      break;
    case FileError::Reason::not_regular:
      diagnostics.report(at, diag::file_not_regular, shown, error.detail);
      break;
    case FileError::Reason::too_large:
      diagnostics.report(at, diag::file_too_large, shown, error.limit >> 20U);
      break;
  }
}

/// The file's name as shown: relative to where the naming file was shown.
std::string shown_name(const std::string& naming, std::string_view path) {
  return (fs::path(naming).parent_path() / fs::path(path)).lexically_normal().string();
}

class Loader {
 public:
  Loader(const LoadOptions& options, Diagnostics& diagnostics) : options_(options), diagnostics_(diagnostics) {}

  Modules run(std::string name, std::string text, const fs::path& path) {
    modules_.sandbox = Sandbox(path, options_.also_read);
    add(std::move(name), std::move(text), path, false);
    return std::move(modules_);
  }

 private:
  /// A module under way: what its `use` are followed from.
  struct Open {
    ModuleId id;
    std::string key;
  };

  ModuleId add(std::string name, std::string text, const fs::path& path, bool library) {
    const SourceFile& file = modules_.sources.add(std::move(name), std::move(text));
    const ModuleId id{static_cast<std::uint32_t>(modules_.modules.size())};
    const std::string key = key_of(path, file.name, library);
    modules_.modules.push_back({parse(file, diagnostics_), path, library, {}});
    known_.emplace(key, id);
    open_.push_back({id, key});
    follow_uses(id);
    open_.pop_back();
    return id;
  }

  static std::string key_of(const fs::path& path, const std::string& name, bool library) {
    return library ? name : path.string();
  }

  void follow_uses(ModuleId id) {
    const std::vector<ast::Item> items = modules_.module(id).ast.items;
    for (const ast::Item& item : items) {
      const auto* use = std::get_if<ast::UseItem>(&item);
      if (use == nullptr) continue;
      const std::optional<ModuleId> used = use->file ? use_file(id, *use->file) : use_library(*use);
      if (used) modules_.modules[id.row].imports.push_back({use->name.text, use->span, *used});
    }
  }

  std::optional<ModuleId> use_library(const ast::UseItem& use) {
    std::vector<std::string_view> names;
    for (const LibraryText& text : options_.library) {
      names.push_back(text.name);
      if (text.name != use.name.text) continue;
      std::string shown = "<library>/" + use.name.text + ".tarn";
      if (const Found known = find(shown, use.span); known.seen) return known.module;
      return add(std::move(shown), std::string(text.text), {}, true);
    }
    const std::string_view near = near_word(use.name.text, names);
    auto tail = diagnostics_.report(use.name.span, diag::unknown_library, use.name.text);
    std::string remedy = near.empty() ? "the library has" : "did you mean `" + std::string(near) + "`? the library has";
    for (const std::string_view name : names) remedy += (name == names.front() ? " `" : ", `") + std::string(name) + "`";
    if (near.empty()) remedy += "; a file of your own is used as `use \"" + use.name.text + ".tarn\" as " + use.name.text + "`";
    tail.remedy(remedy);
    return std::nullopt;
  }

  std::optional<ModuleId> use_file(ModuleId from, const ast::Text& file) {
    const Module& naming = modules_.module(from);
    const std::string path = file.literals.front();
    const std::string shown = shown_name(modules_.sources.file(naming.ast.file).name, path);
    if (!file.inserts.empty()) {
      diagnostics_.report(file.inserts.front().span, diag::text_insert);
      return std::nullopt;
    }
    if (naming.library) {
      report_file({FileError::Reason::outside, {}, 0}, path, file.span, diagnostics_);
      return std::nullopt;
    }
    const auto resolved = modules_.sandbox.resolve(naming.path, path);
    if (!resolved) {
      report_file(resolved.error(), path, file.span, diagnostics_, shown);
      return std::nullopt;
    }
    if (const Found known = find(resolved->string(), file.span); known.seen) return known.module;
    return read_module(file, path, shown, *resolved);
  }

  std::optional<ModuleId> read_module(const ast::Text& file, const std::string& path, const std::string& shown,
                                      const fs::path& resolved) {
    auto text = read_file(resolved, kLargestModel);
    if (!text) {
      report_file(text.error(), path, file.span, diagnostics_);
      return std::nullopt;
    }
    if (open_.size() >= kDeepestUse) {
      diagnostics_.report(file.span, diag::too_deep, static_cast<unsigned>(kDeepestUse));
      return std::nullopt;
    }
    return add(shown, std::move(*text), resolved, false);
  }

  /// A module met before; one that is still open is a cycle, reported here, and no module.
  struct Found {
    bool seen = false;
    std::optional<ModuleId> module;
  };
  Found find(const std::string& key, Span at) {
    const auto known = known_.find(key);
    if (known == known_.end()) return {};
    for (std::size_t i = 0; i < open_.size(); ++i) {
      if (open_[i].key != key) continue;
      diagnostics_.report(at, diag::import_cycle, describe_cycle(i));
      return {true, std::nullopt};
    }
    return {true, known->second};
  }

  std::string describe_cycle(std::size_t first) const {
    std::string text;
    for (std::size_t i = first; i < open_.size(); ++i) text += "`" + shown(open_[i].id) + "` uses ";
    return text + "`" + shown(open_[first].id) + "`";
  }
  const std::string& shown(ModuleId id) const { return modules_.sources.file(modules_.module(id).ast.file).name; }

  const LoadOptions& options_;
  Diagnostics& diagnostics_;
  Modules modules_;
  std::map<std::string, ModuleId> known_;
  std::vector<Open> open_;
};

}  // namespace

Modules load_modules(const fs::path& main_file, const LoadOptions& options, Diagnostics& diagnostics) {
  std::error_code error;
  const fs::path resolved = fs::weakly_canonical(fs::absolute(main_file, error), error);
  auto text = read_file(main_file, kLargestModel);
  if (text) return Loader(options, diagnostics).run(main_file.string(), std::move(*text), resolved);
  Modules modules;
  const SourceFile& empty = modules.sources.add(main_file.string(), "");
  modules.modules.push_back({Ast{empty.id, {}, {}, {}}, resolved, false, {}});
  report_file(text.error(), main_file.string(), {empty.id, 0, 0}, diagnostics);
  return modules;
}

Modules load_text(std::string name, std::string text, const fs::path& folder, const LoadOptions& options,
                  Diagnostics& diagnostics) {
  std::error_code error;
  const fs::path resolved = fs::weakly_canonical(fs::absolute(folder, error), error);
  const fs::path path = resolved / name;
  return Loader(options, diagnostics).run(std::move(name), std::move(text), path);
}

const Table* open_table(Modules& modules, std::string_view path, Span asked, Diagnostics& diagnostics) {
  const auto naming = std::find_if(modules.modules.begin(), modules.modules.end(),
                                   [&](const Module& m) { return m.ast.file == asked.file; });
  TARN_CHECK(naming != modules.modules.end());
  if (naming->library) {
    report_file({FileError::Reason::outside, {}, 0}, path, asked, diagnostics);
    return nullptr;
  }
  const std::string shown = shown_name(modules.sources.file(naming->ast.file).name, path);
  const auto resolved = modules.sandbox.resolve(naming->path, path);
  if (!resolved) {
    report_file(resolved.error(), path, asked, diagnostics, shown);
    return nullptr;
  }
  const auto known = modules.tables.find(*resolved);
  if (known != modules.tables.end()) return known->second ? &*known->second : nullptr;
  auto text = read_file(*resolved, kLargestTable);
  std::optional<Table>& table = modules.tables[*resolved];
  if (!text) {
    report_file(text.error(), path, asked, diagnostics);
    return nullptr;
  }
  table = parse_table(modules.sources.add(shown, std::move(*text)), asked, diagnostics);
  return table ? &*table : nullptr;
}

}  // namespace tarn
