#include "tests/program/process.h"

#include <fcntl.h>
#include <grp.h>
#include <pty.h>
#include <pwd.h>
#include <signal.h>
#include <sys/resource.h>
#include <sys/wait.h>
#include <unistd.h>

#include <chrono>
#include <cstdlib>
#include <fstream>
#include <sstream>
#include <stdexcept>

namespace tarn::testing {
namespace {

namespace fs = std::filesystem;

/// What a child process is to become.
struct Start {
  const std::vector<std::string>& arguments;
  const fs::path& folder;
  const std::vector<std::string>& environment;
  std::string program = TARN_PROGRAM;
  int terminal = -1;                   ///< Standard error, instead of a file.
  const passwd* user = nullptr;        ///< Instead of this one.
};

[[noreturn]] void become_tarn(const Start& start, const fs::path& out, const fs::path& err) {
  const int out_fd = open(out.c_str(), O_WRONLY | O_CREAT | O_TRUNC, 0600);
  const int err_fd = start.terminal >= 0 ? start.terminal : open(err.c_str(), O_WRONLY | O_CREAT | O_TRUNC, 0600);
  const int null_fd = open("/dev/null", O_RDONLY);
  dup2(null_fd, 0);
  dup2(out_fd, 1);
  dup2(err_fd, 2);
  if (start.user != nullptr && (setgroups(0, nullptr) != 0 || setgid(start.user->pw_gid) != 0 || setuid(start.user->pw_uid) != 0)) _exit(125);
  if (chdir(start.folder.c_str()) != 0) _exit(126);
  for (const std::string& pair : start.environment) putenv(const_cast<char*>(pair.c_str()));
  std::vector<char*> argv{const_cast<char*>(start.program.c_str())};
  for (const std::string& argument : start.arguments) argv.push_back(const_cast<char*>(argument.c_str()));
  argv.push_back(nullptr);
  execv(start.program.c_str(), argv.data());
  _exit(127);
}

Outcome collect(int pid, const Scratch& scratch, std::chrono::steady_clock::time_point start) {
  int status = 0;
  rusage usage{};
  wait4(pid, &status, 0, &usage);
  Outcome outcome;
  outcome.seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
  outcome.status = WIFEXITED(status) ? WEXITSTATUS(status) : 128 + WTERMSIG(status);
  outcome.peak_kib = usage.ru_maxrss;
  outcome.out = read_file(scratch.path() / "out");
  outcome.err = read_file(scratch.path() / "err");
  return outcome;
}

Outcome spawn(const Start& what, const std::function<void(int)>& meanwhile = {}) {
  const Scratch scratch;
  const auto start = std::chrono::steady_clock::now();
  const int pid = fork();
  if (pid < 0) throw std::runtime_error("fork failed");
  if (pid == 0) become_tarn(what, scratch.path() / "out", scratch.path() / "err");
  if (meanwhile) meanwhile(pid);
  return collect(pid, scratch, start);
}

/// Everything that is written to the terminal until its last writer is gone.
std::string read_terminal(int master) {
  std::string text;
  char buffer[4096];
  for (;;) {
    const ssize_t got = read(master, buffer, sizeof buffer);
    if (got <= 0) return text;
    text.append(buffer, static_cast<std::size_t>(got));
  }
}

}  // namespace

Outcome run_tarn(const std::vector<std::string>& arguments, const fs::path& folder,
                 const std::vector<std::string>& environment) {
  return spawn({arguments, folder, environment});
}

Outcome run_tarn_while(const std::vector<std::string>& arguments, const fs::path& folder,
                       const std::function<void(int)>& meanwhile) {
  return spawn({arguments, folder, {}}, meanwhile);
}

Outcome run_tarn_on_terminal(const std::vector<std::string>& arguments, const fs::path& folder,
                             const std::vector<std::string>& environment) {
  int master = -1, slave = -1;
  if (openpty(&master, &slave, nullptr, nullptr, nullptr) != 0) throw std::runtime_error("no pseudo-terminal");
  std::string sent;
  Start start{arguments, folder, environment};
  start.terminal = slave;
  Outcome outcome = spawn(start, [&](int) {
    close(slave);
    sent = read_terminal(master);
  });
  close(master);
  outcome.err = sent;
  return outcome;
}

std::optional<Outcome> run_tarn_as_nobody(const std::vector<std::string>& arguments, const fs::path& folder) {
  const passwd* const nobody = getpwnam("nobody");
  if (geteuid() != 0 || nobody == nullptr) return std::nullopt;
  // The build folder may be closed to others: a copy stands where everybody may look.
  const Scratch copy;
  fs::permissions(copy.path(), fs::perms::owner_all | fs::perms::others_read | fs::perms::others_exec);
  const fs::path program = copy.path() / "tarn";
  fs::copy_file(TARN_PROGRAM, program);
  fs::permissions(program, fs::perms::owner_all | fs::perms::others_read | fs::perms::others_exec);
  Start start{arguments, folder, {}};
  start.program = program.string();
  start.user = nobody;
  return spawn(start);
}

Scratch::Scratch() {
  std::string name = (fs::temp_directory_path() / "tarn-test-XXXXXX").string();
  if (mkdtemp(name.data()) == nullptr) throw std::runtime_error("no scratch folder");
  path_ = name;
}

Scratch::~Scratch() {
  std::error_code ignored;
  fs::remove_all(path_, ignored);
}

fs::path Scratch::write(const std::string& name, const std::string& text) const {
  const fs::path file = path_ / name;
  fs::create_directories(file.parent_path());
  std::ofstream(file, std::ios::binary) << text;
  return file;
}

std::string read_file(const fs::path& path) {
  std::ifstream in(path, std::ios::binary);
  std::ostringstream text;
  text << in.rdbuf();
  return text.str();
}

std::size_t Csv::column(const std::string& name) const {
  for (std::size_t i = 0; i < header.size(); ++i) {
    if (header[i] == name) return i;
  }
  throw std::runtime_error("no column " + name);
}

double Csv::number(std::size_t row, const std::string& name) const {
  return std::stod(rows.at(row).at(column(name)));
}

Csv read_csv(const fs::path& path) {
  std::ifstream in(path);
  if (!in) throw std::runtime_error("no file " + path.string());
  Csv csv;
  for (std::string line; std::getline(in, line);) {
    if (!line.empty() && line.back() == '\r') line.pop_back();
    if (line.empty() || line[0] == '#') continue;
    std::vector<std::string> fields;
    std::istringstream cells(line);
    for (std::string cell; std::getline(cells, cell, ',');) fields.push_back(cell);
    if (csv.header.empty()) csv.header = fields;
    else csv.rows.push_back(fields);
  }
  return csv;
}

fs::path source_root() { return TARN_SOURCE_ROOT; }

}  // namespace tarn::testing
