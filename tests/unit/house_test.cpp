// Includes point only where the flow points; heavy libraries stay in their rooms.
#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>
#include <regex>
#include <string>
#include <vector>

namespace fs = std::filesystem;

namespace {

struct Include {
  std::string file, target;
};

std::vector<Include> includes_of_the_house() {
  static const std::regex kLine(R"(^\s*#\s*include\s*[<"]([^>"]+)[>"])");
  std::vector<Include> found;
  for (const char* room : {"lang", "compiler", "runtime"}) {
    for (const auto& entry : fs::recursive_directory_iterator(fs::path(TARN_SOURCE_ROOT) / room)) {
      const std::string extension = entry.path().extension().string();
      if (extension != ".h" && extension != ".cpp" && extension != ".def") continue;
      std::ifstream in(entry.path());
      std::smatch match;
      for (std::string line; std::getline(in, line);) {
        if (std::regex_search(line, match, kLine)) {
          found.push_back({fs::relative(entry.path(), TARN_SOURCE_ROOT).generic_string(), match[1]});
        }
      }
    }
  }
  return found;
}

bool starts(const std::string& text, const std::string& head) { return text.rfind(head, 0) == 0; }

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
  const std::vector<std::string> expected = {"CMakeLists.txt", "DEVELOPERS.md", "README.md", "compiler", "examples",
                                             "lang",           "runtime",       "stdlib",    "tests"};
  for (const std::string& name : expected) {
    INFO(name);
    CHECK(fs::exists(fs::path(TARN_SOURCE_ROOT) / name));
  }
}
