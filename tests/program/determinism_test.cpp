// The same file gives the same bytes: whatever the number of jobs, cached or not.
#include <catch2/catch.hpp>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

/// Result files of one run of a model, joined; run.json apart from what may differ is not among them.
std::string answers(const std::filesystem::path& model, const std::vector<std::string>& options,
                    const std::vector<std::string>& environment) {
  const Scratch scratch;
  std::vector<std::string> arguments{"run", model.string(), "--out", "out"};
  arguments.insert(arguments.end(), options.begin(), options.end());
  const Outcome outcome = run_tarn(arguments, scratch.path(), environment);
  INFO(outcome.err);
  REQUIRE(outcome.status == 0);
  std::string text;
  for (const auto& folder : std::filesystem::directory_iterator(scratch.path() / "out")) {
    for (const char* file : {"results.csv", "traces.csv"}) text += read_file(folder.path() / file);
  }
  REQUIRE(text.size() > 100);
  return text;
}

}  // namespace

TEST_CASE("results are the same bytes for 1, 2 and 5 jobs, cached and not") {
  const Scratch cache;
  const std::vector<std::string> environment{"TARN_CACHE_DIR=" + (cache.path() / "kernels").string()};
  for (const char* example : {"01_avoided_crossing/crossing.tarn", "03_pause_with_offsets/pause.tarn"}) {
    const auto model = source_root() / "examples" / example;
    const std::vector<std::string> sample{"--sample", "7"};
    const std::string first = answers(model, {"--sample", "7", "--jobs", "1"}, environment);
    CHECK(first == answers(model, {"--sample", "7", "--jobs", "2"}, environment));
    CHECK(first == answers(model, {"--sample", "7", "--jobs", "5"}, environment));
    CHECK(first == answers(model, {"--sample", "7", "--no-cache"}, environment));
  }
}
