#include <catch2/catch.hpp>

#include <algorithm>
#include <cstdlib>
#include <fstream>
#include <map>
#include <set>
#include <sstream>

#include "tests/golden/runner.h"

namespace fs = std::filesystem;
using namespace tarn;

namespace {

const fs::path kCases = TARN_GOLDEN_CASES;

std::string read(const fs::path& path) {
  std::ifstream in(path, std::ios::binary);
  std::stringstream text;
  text << in.rdbuf();
  return text.str();
}

std::vector<fs::path> cases_of(const golden::Stage& stage) {
  std::vector<fs::path> cases;
  if (!fs::exists(kCases / stage.folder)) return cases;
  for (const auto& entry : fs::directory_iterator(kCases / stage.folder)) {
    if (entry.path().extension() == ".tarn") cases.push_back(entry.path());
  }
  std::sort(cases.begin(), cases.end());
  return cases;
}

bool updating() {
  const char* value = std::getenv("TARN_UPDATE_GOLDEN");
  return value != nullptr && std::string_view(value) == "1";
}

void compare(const fs::path& path, const golden::Stage& stage) {
  const std::string wanted = read(path);
  const std::string found =
      golden::annotate(path.filename().string(), golden::strip(wanted), path.parent_path(), stage);
  if (updating() && found != wanted) std::ofstream(path, std::ios::binary) << found;
  if (updating()) return;
  INFO(path.string());
  CHECK(found == wanted);
}

/// The test case that shows a kind which no golden case can.
struct NamedTest {
  std::string path, name;
};

/// Rows `kind path test case`.
std::map<std::string, NamedTest> shown_elsewhere() {
  std::map<std::string, NamedTest> rows;
  std::ifstream in(kCases / "shown_elsewhere.txt");
  std::string line;
  while (std::getline(in, line)) {
    std::istringstream words(line);
    std::string kind;
    NamedTest test;
    if (line.starts_with('#') || !(words >> kind >> test.path)) continue;
    std::getline(words >> std::ws, test.name);
    rows[kind] = test;
  }
  return rows;
}

/// What stands between the braces of a test case; empty if the file has no such case.
std::string body_of(const NamedTest& test) {
  const std::string text = read(kCases / ".." / ".." / test.path);
  const std::size_t begin = text.find("TEST_CASE(\"" + test.name + "\")");
  return begin == std::string::npos ? "" : text.substr(begin, text.find("\n}\n", begin) - begin);
}

}  // namespace

TEST_CASE("each golden case reads as it did") {
  for (const golden::Stage& stage : golden::stages()) {
    const std::vector<fs::path> cases = cases_of(stage);
    CHECK_FALSE(cases.empty());
    for (const fs::path& path : cases) compare(path, stage);
  }
}

TEST_CASE("every kind of message is shown by a golden case or by the test that is named for it") {
  std::set<std::string> shown;
  for (const golden::Stage& stage : golden::stages()) {
    for (const fs::path& path : cases_of(stage)) {
      for (const std::string& kind : golden::kinds_in(read(path))) shown.insert(kind);
    }
  }
  const std::map<std::string, NamedTest> elsewhere = shown_elsewhere();
  for (const KindInfo& kind : all_kinds()) {
    const std::string name(kind.name);
    const auto row = elsewhere.find(name);
    INFO(name);
    if (row == elsewhere.end()) {
      CHECK(shown.contains(name));
    } else {
      // The test named must ask for the kind itself, as text.
      CHECK(body_of(row->second).find("\"" + name + "\"") != std::string::npos);
    }
  }
  for (const auto& [name, test] : elsewhere) {
    INFO(name);
    CHECK(std::any_of(all_kinds().begin(), all_kinds().end(), [&](const KindInfo& k) { return k.name == name; }));
    CHECK_FALSE(shown.contains(name));
  }
}
