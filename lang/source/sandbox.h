#pragma once
/// \file Which files a model may read, and reading them.

#include <cstddef>
#include <filesystem>
#include <string>
#include <string_view>
#include <vector>

#include "lang/support/result.h"

namespace tarn {

struct FileError {
  enum class Reason { missing, outside, unreadable, not_regular, too_large };
  Reason reason = Reason::missing;
  std::string detail;  ///< unreadable: the system's words; not_regular: "a folder", "a device or pipe".
  std::size_t limit = 0;  ///< too_large: bytes allowed.
};

/// A model reads below the folder of its main file, and below further folders where the
/// user allows it. Links are resolved before a path is judged.
class Sandbox {
 public:
  Sandbox() = default;
  /// Folders that do not exist allow nothing.
  Sandbox(const std::filesystem::path& main_file, const std::vector<std::filesystem::path>& also_read);

  /// The file meant by `path` in `naming_file` (a resolved path), with links resolved.
  /// A path outside is refused whether or not there is such a file.
  Result<std::filesystem::path, FileError> resolve(const std::filesystem::path& naming_file,
                                                   std::string_view path) const;

 private:
  std::vector<std::filesystem::path> roots_;
};

/// Reads a regular file of at most `limit` bytes; pipes and devices are refused without
/// waiting on them.
Result<std::string, FileError> read_file(const std::filesystem::path& path, std::size_t limit);

}  // namespace tarn
