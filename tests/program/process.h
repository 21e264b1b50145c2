#pragma once
/// \file Runs the real program as a process and keeps what it said.

#include <filesystem>
#include <functional>
#include <optional>
#include <string>
#include <vector>

namespace tarn::testing {

struct Outcome {
  int status = -1;            ///< Exit status; 128 + signal if it was killed.
  std::string out, err;
  double seconds = 0;         ///< Wall time.
  long peak_kib = 0;          ///< Largest resident set.
};

/// Runs `tarn` of this build with the arguments in `folder`. `environment` adds NAME=VALUE pairs.
Outcome run_tarn(const std::vector<std::string>& arguments, const std::filesystem::path& folder = ".",
                 const std::vector<std::string>& environment = {});

/// As run_tarn, but calls `meanwhile` with the process id while it runs.
Outcome run_tarn_while(const std::vector<std::string>& arguments, const std::filesystem::path& folder,
                       const std::function<void(int pid)>& meanwhile);

/// As run_tarn, with a pseudo-terminal as standard error: `err` is what it was sent.
Outcome run_tarn_on_terminal(const std::vector<std::string>& arguments, const std::filesystem::path& folder,
                             const std::vector<std::string>& environment = {});

/// As run_tarn, but with a copy of the program that the user `nobody` runs. None where this process may
/// not become another user, or there is no such user.
std::optional<Outcome> run_tarn_as_nobody(const std::vector<std::string>& arguments, const std::filesystem::path& folder);

/// A folder of its own for one test, removed with it; its name is new each time.
class Scratch {
 public:
  Scratch();
  ~Scratch();
  Scratch(const Scratch&) = delete;
  Scratch& operator=(const Scratch&) = delete;
  const std::filesystem::path& path() const { return path_; }
  /// Writes a file below the folder and returns its path.
  std::filesystem::path write(const std::string& name, const std::string& text) const;

 private:
  std::filesystem::path path_;
};

std::string read_file(const std::filesystem::path& path);

/// Columns of a results file by their header; fields as text.
struct Csv {
  std::vector<std::string> header;
  std::vector<std::vector<std::string>> rows;
  std::size_t column(const std::string& name) const;
  double number(std::size_t row, const std::string& name) const;
};
Csv read_csv(const std::filesystem::path& path);

/// The checkout's root, where examples/ stands.
std::filesystem::path source_root();

}  // namespace tarn::testing
