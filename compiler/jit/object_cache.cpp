#include "compiler/jit/object_cache.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <atomic>
#include <cerrno>
#include <chrono>
#include <cstdlib>
#include <cstring>
#include <filesystem>

namespace tarn::compiler {
namespace {

constexpr std::string_view kMark = "tarnkrn1";
constexpr std::size_t kTrailer = 8 + 2 * sizeof(Digest);

std::string reason() { return std::strerror(errno); }

bool belongs_to_us(const struct stat& info) {
  return info.st_uid == geteuid() && (info.st_mode & (S_IWGRP | S_IWOTH)) == 0;
}

/// A file descriptor that closes itself.
class File {
 public:
  File(const std::string& path, int flags) : descriptor_(::open(path.c_str(), flags | O_CLOEXEC | O_NOFOLLOW, 0600)) {}
  ~File() {
    if (descriptor_ >= 0) ::close(descriptor_);
  }
  File(const File&) = delete;
  File& operator=(const File&) = delete;
  int get() const { return descriptor_; }
  explicit operator bool() const { return descriptor_ >= 0; }

 private:
  int descriptor_;
};

std::optional<std::string> read_all(int descriptor, std::size_t size) {
  std::string bytes(size, '\0');
  std::size_t done = 0;
  while (done < size) {
    const ssize_t got = ::read(descriptor, bytes.data() + done, size - done);
    if (got <= 0) return std::nullopt;
    done += static_cast<std::size_t>(got);
  }
  return bytes;
}

bool write_all(int descriptor, std::string_view bytes) {
  while (!bytes.empty()) {
    const ssize_t put = ::write(descriptor, bytes.data(), bytes.size());
    if (put <= 0) return false;
    bytes.remove_prefix(static_cast<std::size_t>(put));
  }
  return true;
}

std::string_view as_text(const Digest& digest) {
  return {reinterpret_cast<const char*>(digest.data()), digest.size()};
}

std::string trailer_of(std::string_view bytes, const Digest& key) {
  std::string trailer(kMark);
  trailer += as_text(key);
  trailer += as_text(sha256(bytes));
  return trailer;
}

Unexpected<Remark> remark(std::string message) { return Unexpected{Remark{std::move(message)}}; }

/// Files that a living compilation still writes are younger than this.
constexpr auto kAbandoned = std::chrono::hours(1);

bool is_temporary(const std::filesystem::path& path) {
  const std::string name = path.filename().string();
  return name.ends_with(".tmp") || name.ends_with(".tmp.so");
}

void remove_abandoned(const std::string& directory) {
  std::error_code failed;
  const auto oldest = std::filesystem::file_time_type::clock::now() - kAbandoned;
  for (std::filesystem::directory_iterator entry(directory, failed), end; !failed && entry != end; entry.increment(failed)) {
    std::error_code unknown;
    if (!is_temporary(entry->path())) continue;
    const auto written = std::filesystem::last_write_time(entry->path(), unknown);
    if (!unknown && written < oldest) std::filesystem::remove(entry->path(), unknown);
  }
}

}  // namespace

std::string default_cache_directory() {
  const auto variable = [](const char* name) {
    const char* const value = std::getenv(name);
    return std::string(value && value[0] == '/' ? value : "");
  };
  if (const std::string own = variable("TARN_CACHE_DIR"); !own.empty()) return own;
  if (const std::string base = variable("XDG_CACHE_HOME"); !base.empty()) return base + "/tarn";
  if (const std::string home = variable("HOME"); !home.empty()) return home + "/.cache/tarn";
  return {};
}

Result<ObjectCache, Remark> ObjectCache::open(const std::string& directory) {
  if (directory.empty()) return remark("no folder for compiled kernels is known");
  const std::filesystem::path path = directory;
  std::error_code failed;
  std::filesystem::create_directories(path.parent_path(), failed);
  if (::mkdir(directory.c_str(), 0700) != 0 && errno != EEXIST) return remark(directory + ": cannot be made: " + reason());
  struct stat info {};
  if (::stat(directory.c_str(), &info) != 0 || !S_ISDIR(info.st_mode)) return remark(directory + ": is not a folder");
  if (!belongs_to_us(info)) return remark(directory + ": is not used, since others may write to it");
  remove_abandoned(directory);
  return ObjectCache(directory);
}

std::string ObjectCache::path_of(const Digest& key, EntryKind kind) const {
  return directory_ + "/" + to_hex(key) + (kind == EntryKind::shared_object ? ".so" : ".o");
}

std::string ObjectCache::temporary_name(const Digest& key) const {
  static std::atomic<unsigned> counter{0};
  return directory_ + "/" + to_hex(key) + "." + std::to_string(::getpid()) + "." + std::to_string(counter++) + ".tmp";
}

Result<std::optional<Entry>, Remark> ObjectCache::find(const Digest& key, EntryKind kind) const {
  const std::string path = path_of(key, kind);
  const File file(path, O_RDONLY);
  if (!file && errno == ENOENT) return std::optional<Entry>();
  struct stat info {};
  if (!file || ::fstat(file.get(), &info) != 0) return remark(path + ": cannot be read: " + reason());
  if (!S_ISREG(info.st_mode) || !belongs_to_us(info)) return remark(path + ": is not used, since others may write to it");
  auto bytes = read_all(file.get(), static_cast<std::size_t>(info.st_size));
  if (!bytes || bytes->size() <= kTrailer) return remark(path + ": is damaged");
  const std::string found = bytes->substr(bytes->size() - kTrailer);
  bytes->resize(bytes->size() - kTrailer);
  if (found != trailer_of(*bytes, key)) return remark(path + ": is damaged");
  if (kind == EntryKind::shared_object) bytes->clear();
  return std::optional(Entry{path, std::move(*bytes)});
}

Result<Done, Remark> ObjectCache::store(const std::string& temporary, const Digest& key, EntryKind kind) const {
  const std::string path = path_of(key, kind);
  const File file(temporary, O_RDWR);
  struct stat info {};
  if (!file || ::fstat(file.get(), &info) != 0 || ::fchmod(file.get(), 0600) != 0) return remark(temporary + ": " + reason());
  const auto bytes = read_all(file.get(), static_cast<std::size_t>(info.st_size));
  if (!bytes || !write_all(file.get(), trailer_of(*bytes, key))) return remark(temporary + ": " + reason());
  if (::rename(temporary.c_str(), path.c_str()) != 0) return remark(path + ": " + reason());
  return Done{};
}

bool write_private_file(const std::string& path, std::string_view bytes) {
  const File file(path, O_WRONLY | O_CREAT | O_TRUNC);
  return file && write_all(file.get(), bytes);
}

}  // namespace tarn::compiler
