#include "compiler/jit/linker.h"

#include <fcntl.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <cerrno>
#include <cstdlib>
#include <sstream>
#include <vector>

#include "compiler/jit/host.h"

namespace tarn::compiler {
namespace {

/// Runs a program without input or output; true if it ended with status 0.
bool run(const std::vector<std::string>& words) {
  std::vector<char*> arguments;
  for (const std::string& word : words) arguments.push_back(const_cast<char*>(word.c_str()));
  arguments.push_back(nullptr);
  posix_spawn_file_actions_t files;
  posix_spawn_file_actions_init(&files);
  for (const int stream : {STDIN_FILENO, STDOUT_FILENO, STDERR_FILENO})
    posix_spawn_file_actions_addopen(&files, stream, "/dev/null", stream == STDIN_FILENO ? O_RDONLY : O_WRONLY, 0);
  pid_t child = 0;
  const int failed = posix_spawn(&child, arguments[0], &files, nullptr, arguments.data(), environ);
  posix_spawn_file_actions_destroy(&files);
  if (failed != 0) return false;
  int status = 0;
  while (waitpid(child, &status, 0) < 0)
    if (errno != EINTR) return false;
  return WIFEXITED(status) && WEXITSTATUS(status) == 0;
}

}  // namespace

std::optional<std::string> find_linker() {
  const char* const path = std::getenv("PATH");
  std::istringstream folders(path ? path : "/usr/bin:/bin");
  for (std::string folder; std::getline(folders, folder, ':');) {
    if (!folder.starts_with('/')) continue;
    std::string linker = folder + "/ld";
    if (access(linker.c_str(), X_OK) == 0) return linker;
  }
  return std::nullopt;
}

bool link_shared(const std::string& linker, const std::string& object, const std::string& shared_object) {
  std::vector<std::string> words{linker, "-shared", "--build-id=none", "--hash-style=gnu", "-znoexecstack",
                                 "--as-needed", "-o", shared_object, object};
  for (const char* const name : {"libmvec.so.1", "libm.so.6"})
    if (const std::string path = library_path(name); !path.empty()) words.push_back(path);
  return run(words);
}

}  // namespace tarn::compiler
