// How long a process takes from spawn to its end: an empty one, tarn warm (kernels in the cache),
// tarn cold (an empty cache), tarn check. Minimum, median of interleaved repeats; ratios to the empty process.
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <cstdio>
#include <filesystem>
#include <fstream>
#include <functional>
#include <string>
#include <vector>

extern char** environ;

namespace fs = std::filesystem;

namespace {

constexpr int kRepeats = 21;

/// Wall milliseconds of one spawn; output is thrown away.
double spawn_ms(const std::vector<std::string>& words) {
  std::vector<char*> argv;
  for (const std::string& word : words) argv.push_back(const_cast<char*>(word.c_str()));
  argv.push_back(nullptr);
  posix_spawn_file_actions_t actions;
  posix_spawn_file_actions_init(&actions);
  posix_spawn_file_actions_addopen(&actions, 1, "/dev/null", 1 /* O_WRONLY */, 0);
  posix_spawn_file_actions_addopen(&actions, 2, "/dev/null", 1, 0);
  const auto start = std::chrono::steady_clock::now();
  pid_t pid = 0;
  if (posix_spawn(&pid, argv[0], &actions, nullptr, argv.data(), environ) != 0) return -1;
  int status = 0;
  waitpid(pid, &status, 0);
  const std::chrono::duration<double, std::milli> taken = std::chrono::steady_clock::now() - start;
  posix_spawn_file_actions_destroy(&actions);
  return status == 0 ? taken.count() : -1;
}

struct Row {
  const char* name;
  std::function<void()> before;
  std::vector<std::string> words;
  std::vector<double> taken;
};

}  // namespace

int main(int argc, char** argv) {
  if (argc != 3) return std::fprintf(stderr, "usage: bench_start TARN MODEL\n"), 2;
  const std::string tarn = argv[1], model = argv[2];
  const fs::path work = fs::temp_directory_path() / ("tarn-bench-" + std::to_string(getpid()));
  fs::create_directories(work);
  const std::string warm = (work / "warm").string(), cold = (work / "cold").string();
  const std::string out = (work / "out").string();
  const auto fresh = [&] { fs::remove_all(out); };
  const auto use = [](const std::string& cache) { setenv("TARN_CACHE_DIR", cache.c_str(), 1); };
  const std::vector<std::string> run{tarn, "run", model, "--out", out, "--jobs", "1"};
  use(warm);
  spawn_ms(run);
  std::vector<Row> rows{
      {"an empty process", [] {}, {"/bin/true"}, {}},
      {"tarn --version", [] {}, {tarn, "--version"}, {}},
      {"tarn check", [] {}, {tarn, "check", model}, {}},
      {"tarn run, warm", [&] { use(warm), fresh(); }, run, {}},
      {"tarn run, cold", [&] { use(cold), fs::remove_all(cold), fresh(); }, run, {}},
  };
  for (int repeat = 0; repeat < kRepeats; ++repeat) {
    for (Row& row : rows) {
      row.before();
      row.taken.push_back(spawn_ms(row.words));
    }
  }
  fs::remove_all(work);
  double empty = 0;
  std::printf("%-18s %10s %10s %8s\n", "", "min [ms]", "median", "ratio");
  for (Row& row : rows) {
    std::sort(row.taken.begin(), row.taken.end());
    const double median = row.taken[row.taken.size() / 2];
    if (empty == 0) empty = median;
    std::printf("%-18s %10.2f %10.2f %8.2f\n", row.name, row.taken.front(), median, median / empty);
  }
  return 0;
}
