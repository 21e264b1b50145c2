#include "runtime/experiment/folder.h"

#include <fmt/format.h>
#include <unistd.h>

#include <array>
#include <cstdlib>
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

constexpr const char* kElsewhere = "choose another folder with --out";

Unexpected<FolderError> refuse(std::string kind, std::string message, std::string remedy = {}) {
  return Unexpected{FolderError{std::move(kind), std::move(message), std::move(remedy)}};
}

/// A number as the user would write it.
std::string number_as_written(const ordered_json& value) {
  return value.is_number() ? fmt::format("{}", value.get<double>()) : value.dump();
}

/// What differs between two objects of names and values, in the user's words.
void compare_named(const ordered_json& there, const ordered_json& here, const char* what,
                   std::vector<std::string>& differences) {
  for (const auto& [name, value] : here.items()) {
    if (!there.contains(name)) differences.push_back(fmt::format("{} {} is new", what, name));
    else if (there[name] != value) {
      differences.push_back(fmt::format("{} {} is {} there, {} here", what, name, number_as_written(there[name]), number_as_written(value)));
    }
  }
  for (const auto& [name, value] : there.items()) {
    if (!here.contains(name)) differences.push_back(fmt::format("{} {} is gone", what, name));
  }
}

ordered_json digests(const ordered_json& key) {
  ordered_json result = ordered_json::object();
  for (const ordered_json& text : key.value("texts", ordered_json::array())) {
    result[text.value("name", "")] = text.value("sha256", "");
  }
  return result;
}

/// In what two keys differ, three things at most.
std::string differences_of(const ordered_json& there, const ordered_json& here) {
  std::vector<std::string> all;
  if (there.value("version", "") != here.value("version", "")) {
    all.push_back(fmt::format("version {} there, {} here", there.value("version", ""), here.value("version", "")));
  } else if (there.value("build", "") != here.value("build", "")) {
    all.push_back("another build of the program");
  }
  const ordered_json old_texts = digests(there), texts = digests(here);
  for (const auto& [name, digest] : texts.items()) {
    if (!old_texts.contains(name)) all.push_back(fmt::format("`{}` was not read", name));
    else if (old_texts[name] != digest) all.push_back(fmt::format("`{}` has changed", name));
  }
  for (const auto& [name, digest] : old_texts.items()) {
    if (!texts.contains(name)) all.push_back(fmt::format("`{}` is not read any more", name));
  }
  for (const char* group : {"parameters", "counts"}) {
    const ordered_json none = ordered_json::object();
    const bool count = group[0] == 'c';
    compare_named(there.value(group, none), here.value(group, none), count ? "count" : "parameter", all);
  }
  if (all.empty()) return "another form of record";
  constexpr std::size_t kMost = 3;
  std::string text = all.front();
  for (std::size_t i = 1; i < std::min(kMost, all.size()); ++i) text += "; " + all[i];
  return all.size() > kMost ? fmt::format("{}; and {} more", text, all.size() - kMost) : text;
}

/// False where the folder cannot be made or nothing can be written into it. Whether a new one can be made does not
/// show in the permissions on every kind of file system: one is made and taken away again.
bool may_be_written(const fs::path& folder) {
  std::error_code failure;
  fs::path place = fs::absolute(folder, failure);
  while (!fs::exists(place, failure) && place.has_relative_path()) place = place.parent_path();
  if (!fs::is_directory(place, failure) || access(place.c_str(), W_OK | X_OK) != 0) return false;
  if (fs::exists(folder, failure)) return true;
  std::string trial = (place / ".tarn-XXXXXX").string();
  return mkdtemp(trial.data()) != nullptr && rmdir(trial.c_str()) == 0;
}

Result<Done, FolderError> check_key(const fs::path& folder, const FolderContents& contents, const ordered_json& key) {
  const auto record = contents.find("run.json");
  if (record == contents.end()) {
    if (contents.empty()) return Done{};
    return refuse("foreign_file", fmt::format("`{}` has results but no run.json", folder.string()), kElsewhere);
  }
  const ordered_json run = ordered_json::parse(record->second, nullptr, false);
  if (run.is_discarded() || !run.is_object() || !run.contains("key")) {
    return refuse("folder_unreadable",
                  fmt::format("`{}` is not a record of this program", (folder / "run.json").string()), kElsewhere);
  }
  if (run["key"] == key) return Done{};
  return refuse("other_key",
                fmt::format("`{}` holds the results of another run: {}", folder.string(), differences_of(run["key"], key)),
                fmt::format("{}, or remove this one", kElsewhere));
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
  const bool there = fs::exists(fs::symlink_status(folder, failure));
  if (there && !fs::is_directory(folder, failure)) {
    return refuse("foreign_file", fmt::format("`{}` is not a folder", folder.string()), kElsewhere);
  }
  if (!may_be_written(folder)) {
    return refuse("not_written", fmt::format("nothing can be written into `{}`", folder.string()),
                  "look at the permissions, or choose another folder with --out");
  }
  if (!there) return contents;
  fs::directory_iterator entries(folder, failure);
  if (failure) return refuse("folder_unreadable", fmt::format("`{}`: {}", folder.string(), failure.message()));
  for (const fs::directory_entry& entry : entries) {
    const std::string name = entry.path().filename().string();
    if (!is_ours(name) || !entry.is_regular_file(failure)) {
      return refuse("foreign_file",
                    fmt::format("`{}` holds `{}`, which is no result of a run", folder.string(), name), kElsewhere);
    }
    if (name.ends_with(kPart)) continue;
    auto text = read_file(entry.path());
    if (!text) return refuse("folder_unreadable", fmt::format("`{}` cannot be read", entry.path().string()));
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
