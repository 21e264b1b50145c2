#include "lang/source/sandbox.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <system_error>

namespace tarn {
namespace {

namespace fs = std::filesystem;

bool is_below(const fs::path& path, const fs::path& root) {
  return std::mismatch(root.begin(), root.end(), path.begin(), path.end()).first == root.end();
}

std::string system_words(int error) { return std::generic_category().message(error); }

/// Closes the descriptor when it goes.
class Descriptor {
 public:
  explicit Descriptor(int value) : value_(value) {}
  Descriptor(const Descriptor&) = delete;
  Descriptor& operator=(const Descriptor&) = delete;
  ~Descriptor() {
    if (value_ >= 0) ::close(value_);
  }
  int get() const { return value_; }

 private:
  int value_;
};

Unexpected<FileError> failed(FileError::Reason reason, std::string detail = {}, std::size_t limit = 0) {
  return Unexpected<FileError>{{reason, std::move(detail), limit}};
}

Unexpected<FileError> failed_with(int error) {
  if (error == ENOENT || error == ENOTDIR) return failed(FileError::Reason::missing);
  return failed(FileError::Reason::unreadable, system_words(error));
}

}  // namespace

Sandbox::Sandbox(const fs::path& main_file, const std::vector<fs::path>& also_read) {
  std::error_code error;
  const fs::path main = fs::weakly_canonical(fs::absolute(main_file, error), error);
  if (!error) roots_.push_back(main.parent_path());
  for (const fs::path& folder : also_read) {
    const fs::path resolved = fs::canonical(folder, error);
    if (!error) roots_.push_back(resolved);
  }
}

Result<fs::path, FileError> Sandbox::resolve(const fs::path& naming_file, std::string_view path) const {
  if (path.empty()) return failed(FileError::Reason::missing);
  std::error_code error;
  const fs::path resolved = fs::weakly_canonical(naming_file.parent_path() / fs::path(path), error);
  if (error) return failed_with(error.value());
  const bool allowed = std::any_of(roots_.begin(), roots_.end(), [&](const fs::path& r) { return is_below(resolved, r); });
  if (!allowed) return failed(FileError::Reason::outside);
  const fs::file_status status = fs::status(resolved, error);
  if (status.type() == fs::file_type::not_found) return failed(FileError::Reason::missing);
  return resolved;
}

Result<std::string, FileError> read_file(const fs::path& path, std::size_t limit) {
  // Not blocking: a pipe nobody writes to must not hold up the run.
  const Descriptor file(::open(path.c_str(), O_RDONLY | O_NONBLOCK | O_CLOEXEC));
  if (file.get() < 0) return failed_with(errno);
  struct stat status{};
  if (::fstat(file.get(), &status) != 0) return failed_with(errno);
  if (S_ISDIR(status.st_mode)) return failed(FileError::Reason::not_regular, "a folder");
  if (!S_ISREG(status.st_mode)) return failed(FileError::Reason::not_regular, "a device or pipe");
  if (static_cast<std::size_t>(status.st_size) > limit) return failed(FileError::Reason::too_large, {}, limit);
  std::string text(static_cast<std::size_t>(status.st_size), '\0');
  std::size_t done = 0;
  while (done < text.size()) {
    const ssize_t count = ::read(file.get(), text.data() + done, text.size() - done);
    if (count < 0 && errno == EINTR) continue;
    if (count < 0) return failed_with(errno);
    if (count == 0) break;
    done += static_cast<std::size_t>(count);
  }
  text.resize(done);
  return text;
}

}  // namespace tarn
