#pragma once
/// \file The folder of one experiment's results: may it be used, what does it hold already, and
/// writing it so that a file is either old or new, never half.

#include <filesystem>
#include <map>
#include <nlohmann/json_fwd.hpp>
#include <optional>
#include <string>

#include "lang/support/result.h"

namespace tarn::runtime {

/// Why a folder is refused, in the user's terms; nothing in it was touched.
struct FolderError {
  std::string kind;     ///< other_key, foreign_file, folder_unreadable, not_written
  std::string message;
  std::string remedy = {};
};

/// Texts of the files an earlier run with the same key left, by name.
using FolderContents = std::map<std::string, std::string>;

/// Looks at DIR/EXPERIMENT. Empty if there is nothing yet. Errors: a file the program does not
/// write, or a run.json whose `key` differs from `key` (the message says in what), or files without a
/// run.json, or a place where nothing can be written.
Result<FolderContents, FolderError> inspect_folder(const std::filesystem::path& folder,
                                                   const nlohmann::ordered_json& key);

/// Writes each file under another name first and renames it; run.json last. Makes the folder.
Result<Done, FolderError> write_folder(const std::filesystem::path& folder, const FolderContents& files);

}  // namespace tarn::runtime
