#include "runtime/experiment/folder.h"

#include <fmt/format.h>

#include <array>
#include <fstream>
#include <nlohmann/json.hpp>
#include <sstream>
#include <string_view>

namespace tarn::runtime {
namespace {

namespace fs = std::filesystem;
using nlohmann::ordered_json;

constexpr std::array<std::string_view, 7> kFiles = {"results.csv", "traces.csv",    "distribution.csv", "validity.csv",
                                                    "fit.csv",     "residuals.csv", "run.json"};
constexpr std::string_view kPart = ".part";

/// The name of a result file, or of one that was being written when a run was killed.
bool is_ours(std::string_view name) {
  if (name.ends_with(kPart)) name.remove_suffix(kPart.size());
  for (const std::string_view file : kFiles) {
    if (name == file) return true;
  }
  return false;
}

std::optional<std::string> read_file(const fs::path& path) {
  std::ifstream stream(path, std::ios::binary);
  std::ostringstream text;
  text << stream.rdbuf();
  if (!stream) return std::nullopt;
  return text.str();
}

Unexpected<FolderError> refuse(std::string kind, std::string message) {
  return Unexpected{FolderError{std::move(kind), std::move(message)}};
}

Result<Done, FolderError> check_key(const fs::path& folder, const FolderContents& contents, const ordered_json& key) {
  const auto record = contents.find("run.json");
  if (record == contents.end()) {
    if (contents.empty()) return Done{};
    return refuse("foreign_file", fmt::format("`{}` has results but no run.json; choose another folder with --out",
                                              folder.string()));
  }
  const ordered_json run = ordered_json::parse(record->second, nullptr, false);
  if (run.is_discarded() || !run.is_object() || !run.contains("key")) {
    return refuse("unreadable", fmt::format("`{}` is not a record of this program", (folder / "run.json").string()));
  }
  if (run["key"] == key) return Done{};
  return refuse("other_key", fmt::format("`{}` holds the results of another text, parameters or version; choose "
                                         "another folder with --out or remove this one",
                                         folder.string()));
}

bool write_file(const fs::path& path, const std::string& text) {
  std::ofstream stream(path, std::ios::binary | std::ios::trunc);
  stream.write(text.data(), static_cast<std::streamsize>(text.size()));
  stream.close();
  return static_cast<bool>(stream);
}

Result<Done, FolderError> replace_file(const fs::path& path, const std::string& text) {
  fs::path part = path;
  part += kPart;
  std::error_code failure;
  if (!write_file(part, text)) {
    fs::remove(part, failure);
    return refuse("not_written", fmt::format("`{}` cannot be written", path.string()));
  }
  fs::rename(part, path, failure);
  if (failure) {
    return refuse("not_written", fmt::format("`{}` cannot be written: {}", path.string(), failure.message()));
  }
  return Done{};
}

}  // namespace

Result<FolderContents, FolderError> inspect_folder(const fs::path& folder, const ordered_json& key) {
  FolderContents contents;
  std::error_code failure;
  if (!fs::exists(fs::symlink_status(folder, failure))) return contents;
  if (!fs::is_directory(folder, failure)) {
    return refuse("foreign_file", fmt::format("`{}` is not a folder; choose another with --out", folder.string()));
  }
  fs::directory_iterator entries(folder, failure);
  if (failure) return refuse("unreadable", fmt::format("`{}`: {}", folder.string(), failure.message()));
  for (const fs::directory_entry& entry : entries) {
    const std::string name = entry.path().filename().string();
    if (!is_ours(name) || !entry.is_regular_file(failure)) {
      return refuse("foreign_file", fmt::format("`{}` holds `{}`, which is no result of a run; choose another folder "
                                                "with --out", folder.string(), name));
    }
    if (name.ends_with(kPart)) continue;
    auto text = read_file(entry.path());
    if (!text) return refuse("unreadable", fmt::format("`{}` cannot be read", entry.path().string()));
    contents[name] = std::move(*text);
  }
  const auto known = check_key(folder, contents, key);
  if (!known) return Unexpected{known.error()};
  return contents;
}

Result<Done, FolderError> write_folder(const fs::path& folder, const FolderContents& files) {
  std::error_code failure;
  fs::create_directories(folder, failure);
  if (failure) {
    return refuse("not_written", fmt::format("`{}` cannot be made: {}", folder.string(), failure.message()));
  }
  for (const auto& [name, text] : files) {
    if (name == "run.json") continue;
    const auto done = replace_file(folder / name, text);
    if (!done) return done;
  }
  const auto record = files.find("run.json");
  return record == files.end() ? Done{} : replace_file(folder / "run.json", record->second);
}

}  // namespace tarn::runtime
