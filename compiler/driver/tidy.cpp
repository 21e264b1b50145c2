#include "lang/syntax/tidy.h"

#include <cstdio>
#include <filesystem>
#include <fstream>

#include "compiler/driver/commands.h"
#include "compiler/driver/messages.h"
#include "compiler/driver/model.h"
#include "lang/source/loader.h"

namespace tarn::compiler {
namespace {

/// Replaces the file by rename, so that it is either as it was or tidy.
bool replace_file(const std::filesystem::path& path, const std::string& text) {
  const std::filesystem::path fresh = path.string() + ".tidy";
  std::ofstream out(fresh, std::ios::binary | std::ios::trunc);
  out << text;
  out.close();
  std::error_code failure;
  if (out) {
    std::filesystem::permissions(fresh, std::filesystem::status(path).permissions(), failure);
    std::filesystem::rename(fresh, path, failure);
  }
  if (out && !failure) return true;
  std::filesystem::remove(fresh, failure);
  return false;
}

/// What the file uses is not read: only its own layout matters.
std::optional<std::string> tidied(const ModelOptions& model) {
  Diagnostics diagnostics;
  auto read = read_file(model.file, kLargestModel);
  if (!read) {
    const Modules unread = load_modules(model.file, {}, diagnostics);
    show_diagnostics(diagnostics, unread.sources, model.json_diagnostics);
    return std::nullopt;
  }
  SourceSet sources;
  const auto text = tidy(sources.add(model.file, std::move(*read)), diagnostics);
  show_diagnostics(diagnostics, sources, model.json_diagnostics);
  return text;
}

}  // namespace

int tidy_model(const TidyCommand& command) {
  const auto text = tidied(command.model);
  if (!text) return kWrongInput;
  if (!command.in_place) {
    std::fwrite(text->data(), 1, text->size(), stdout);
    return kFine;
  }
  if (replace_file(std::filesystem::canonical(command.model.file), *text)) return kFine;
  show({"not_written", "`" + command.model.file + "` cannot be written", "look at its permissions and its folder's"},
       command.model.json_diagnostics);
  return kWrongInput;
}

}  // namespace tarn::compiler
