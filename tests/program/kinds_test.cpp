// Kinds of messages made while running: the table "While running" of lang/ERRORS.md has each that the
// sources make, and no other.
#include <catch2/catch.hpp>

#include <map>
#include <regex>
#include <set>
#include <sstream>

#include "tests/program/process.h"

using namespace tarn::testing;
namespace fs = std::filesystem;

namespace {

/// Rows "| `kind` | meaning | remedy |".
std::set<std::string> documented() {
  static const std::regex kRow(R"(^\| `([a-z_]+)` \| .{4,} \| .{4,} \|$)");
  std::set<std::string> kinds;
  std::istringstream lines(read_file(source_root() / "lang" / "ERRORS.md"));
  std::smatch match;
  for (std::string line; std::getline(lines, line);) {
    if (!line.starts_with("| `")) continue;
    INFO(line);
    REQUIRE(std::regex_match(line, match, kRow));
    CHECK(kinds.insert(match[1]).second);
  }
  return kinds;
}

/// Kinds a source text makes, by the forms in which the house writes them.
void collect(const std::string& text, std::set<std::string>& kinds) {
  static const std::regex kForms[] = {
      std::regex(R"re((?:RunError|FolderError|Message)(?: \w+)?\{\s*"([a-z_]+)")re"),
      std::regex(R"re(\b(?:fail|refuse)\(\s*"([a-z_]+)")re"),
      std::regex(R"re(\b(?:show|say|push_back)\(\{\s*"([a-z_]+)")re"),
      std::regex(R"re(\bcomplain\(command,\s*\{\s*"([a-z_]+)")re"),
      std::regex(R"re(\badd\(kStatus\w+,\s*"([a-z_]+)")re"),
      std::regex(R"re(\breturn \{"([a-z_]+)",\s)re"),
      std::regex(R"re(\bpush_back\(\{\w+ \? "([a-z_]+)")re"),
      std::regex(R"re(\bpush_back\(\{\w+ \? "[a-z_]+" : "([a-z_]+)")re"),
  };
  for (const std::regex& form : kForms) {
    for (std::sregex_iterator match(text.begin(), text.end(), form), end; match != end; ++match) kinds.insert((*match)[1]);
  }
}

std::set<std::string> made() {
  std::set<std::string> kinds;
  for (const char* folder : {"runtime", "compiler/driver"}) {
    for (const auto& entry : fs::recursive_directory_iterator(source_root() / folder)) {
      if (entry.path().extension() == ".cpp") collect(read_file(entry.path()), kinds);
    }
  }
  return kinds;
}

}  // namespace

TEST_CASE("the table of messages while running is what the sources make") {
  const std::set<std::string> rows = documented(), kinds = made();
  CHECK(kinds.contains("other_key"));
  CHECK(kinds.contains("out_of_time"));
  for (const std::string& kind : kinds) {
    INFO(kind);
    CHECK(rows.contains(kind));
  }
  for (const std::string& row : rows) {
    INFO(row);
    CHECK(kinds.contains(row));
  }
}
