#pragma once
/// \file Compiled kernels on disk: one file a key, verified before use, written by rename.
///
/// An entry is a shared object (KEY.so) or, where there is no linker, an object (KEY.o), followed by
/// a trailer of 72 bytes: a mark, the key, and the SHA-256 of what comes before. The trailer finds
/// damage, half-written and misplaced files; that nobody else writes here is what the folder's
/// permissions are for.

#include <optional>
#include <string>
#include <string_view>

#include "compiler/jit/digest.h"
#include "lang/support/result.h"

namespace tarn::compiler {

/// Why the cache was not used for something. Never an error: the kernel is compiled instead.
struct Remark {
  std::string message;
};

/// $TARN_CACHE_DIR, else $XDG_CACHE_HOME/tarn, else $HOME/.cache/tarn; empty if none is absolute.
std::string default_cache_directory();

enum class EntryKind { shared_object, object };

/// A verified entry. `bytes` is the object itself; for a shared object it stays empty.
struct Entry {
  std::string path;
  std::string bytes;
};

/// A cache folder that belongs to this user alone.
class ObjectCache {
 public:
  /// Makes the folder (mode 0700) if it is missing and removes what compilations that were killed left
  /// in it over an hour ago. Remarks: it cannot be made, is another user's, or
  /// others may write to it.
  static Result<ObjectCache, Remark> open(const std::string& directory);

  /// The entry of this key; no value if there is none. A remark if there is one that is damaged,
  /// foreign or not this user's alone.
  Result<std::optional<Entry>, Remark> find(const Digest& key, EntryKind kind) const;

  /// Where store() will put the entry, and a fresh name beside it to write to first.
  std::string path_of(const Digest& key, EntryKind kind) const;
  std::string temporary_name(const Digest& key) const;

  /// Adds the trailer to a finished file of this folder and renames it into place.
  Result<Done, Remark> store(const std::string& temporary, const Digest& key, EntryKind kind) const;

 private:
  explicit ObjectCache(std::string directory) : directory_(std::move(directory)) {}
  std::string directory_;
};

/// Writes a whole file, readable by its owner only.
bool write_private_file(const std::string& path, std::string_view bytes);

}  // namespace tarn::compiler
