// Includes point only where the flow points; heavy libraries stay in their rooms.
#include <algorithm>
#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>
#include <optional>
#include <set>
#include <string>
#include <vector>

namespace fs = std::filesystem;

namespace {

struct Include {
  std::string file, target;
};

/// What `#include <...>` or `#include "..."` names, blanks anywhere.
std::optional<std::string> include_of(const std::string& line) {
  const auto skip = [&](std::size_t at) { return std::min(line.find_first_not_of(" \t", at), line.size()); };
  std::size_t at = skip(0);
  if (line.compare(at, 1, "#") != 0) return {};
  at = skip(at + 1);
  if (line.compare(at, 7, "include") != 0) return {};
  at = skip(at + 7);
  if (at == line.size() || (line[at] != '<' && line[at] != '"')) return {};
  const std::size_t end = line.find(line[at] == '<' ? '>' : '"', at + 1);
  if (end == std::string::npos) return {};
  return line.substr(at + 1, end - at - 1);
}

std::vector<Include> includes_of_the_house() {
  std::vector<Include> found;
  for (const char* room : {"lang", "compiler", "runtime"}) {
    for (const auto& entry : fs::recursive_directory_iterator(fs::path(TARN_SOURCE_ROOT) / room)) {
      const std::string extension = entry.path().extension().string();
      if (extension != ".h" && extension != ".cpp" && extension != ".def") continue;
      std::ifstream in(entry.path());
      for (std::string line; std::getline(in, line);) {
        if (const auto target = include_of(line)) {
          found.push_back({fs::relative(entry.path(), TARN_SOURCE_ROOT).generic_string(), *target});
        }
      }
    }
  }
  return found;
}

bool starts(const std::string& text, const std::string& head) { return text.rfind(head, 0) == 0; }

bool ends(const std::string& text, const std::string& tail) {
  return text.size() >= tail.size() && text.compare(text.size() - tail.size(), tail.size(), tail) == 0;
}

bool is_ours(const std::string& target) {
  return starts(target, "lang/") || starts(target, "compiler/") || starts(target, "runtime/");
}

bool allowed(const std::string& file, const std::string& target) {
  if (starts(file, "compiler/driver/")) return true;
  if (starts(file, "compiler/jit/") && starts(target, "runtime/kernel/")) return true;
  if (starts(file, "compiler/")) {
    return !starts(target, "runtime/") || starts(target, "runtime/abi/") || starts(target, "runtime/plan/");
  }
  if (starts(file, "lang/")) return starts(target, "lang/");
  return starts(target, "runtime/") || starts(target, "lang/support/");
}

/// The rooms a library may be included in; empty if it may be anywhere.
std::vector<std::string> rooms_of(const std::string& target) {
  if (starts(target, "tao/pegtl")) return {"lang/syntax/"};
  if (starts(target, "llvm/") || starts(target, "llvm-c/")) return {"compiler/codegen/", "compiler/jit/"};
  if (starts(target, "Eigen/") || starts(target, "Spectra/") || starts(target, "unsupported/Eigen")) return {"runtime/"};
  if (starts(target, "CLI/")) return {"compiler/driver/"};
  return {};
}

}  // namespace

TEST_CASE("includes follow the flow") {
  const auto includes = includes_of_the_house();
  REQUIRE(includes.size() > 200);
  for (const Include& include : includes) {
    if (!is_ours(include.target)) continue;
    INFO(include.file << " includes " << include.target);
    CHECK(allowed(include.file, include.target));
  }
}

TEST_CASE("libraries stay in their rooms") {
  for (const Include& include : includes_of_the_house()) {
    const auto rooms = rooms_of(include.target);
    bool inside = rooms.empty();
    for (const std::string& room : rooms) inside = inside || starts(include.file, room);
    INFO(include.file << " includes " << include.target);
    CHECK(inside);
  }
}

TEST_CASE("the top level holds what it should and nothing else") {
  const std::set<std::string> expected = {"CMakeLists.txt", "DEVELOPERS.md", "README.md", "compiler", "examples",
                                          "lang",           "runtime",       "stdlib",    "tests"};
  // What .gitignore names: build folders and the results of runs.
  const auto ignored = [](const fs::directory_entry& entry) {
    const std::string name = entry.path().filename().string();
    return entry.is_directory() && (starts(name, "build") || ends(name, "-results"));
  };
  std::set<std::string> found;
  for (const auto& entry : fs::directory_iterator(TARN_SOURCE_ROOT)) {
    const std::string name = entry.path().filename().string();
    if (!starts(name, ".") && !ignored(entry)) found.insert(name);
  }
  CHECK(found == expected);
}
