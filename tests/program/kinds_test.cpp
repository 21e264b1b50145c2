// Kinds of messages made while running: the table "While running" of lang/ERRORS.md has each that the
// sources make, and no other.
#include <algorithm>
#include <catch2/catch.hpp>
#include <regex>
#include <set>
#include <sstream>
#include <string_view>

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

/// True if a literal that stands behind `before` (without spaces at its end) is a kind, by the forms in
/// which the house writes them.
bool makes_kind(std::string_view before) {
  static constexpr std::string_view kForms[] = {"RunError{",    "FolderError{",       "fail(",          "refuse(",
                                                "show({",       "say({",              "push_back({",    "complain(command,{",
                                                "return{",      "push_back({fails?",  "push_back({interrupted?"};
  if (std::any_of(std::begin(kForms), std::end(kForms), [&](std::string_view form) { return before.ends_with(form); })) return true;
  for (const std::string_view status : {"add(kStatusLoose,", "add(kStatusNotFinite,"}) {
    if (before.ends_with(status)) return true;
  }
  const std::string_view choice = "push_back({";
  const auto begin = before.rfind(choice);
  return begin != std::string_view::npos && before.ends_with("\":") && before.find('?', begin) != std::string_view::npos &&
         before.find(',', begin) == std::string_view::npos;
}

void collect_kinds(const std::string& text, std::set<std::string>& kinds) {
  const std::string letters = "abcdefghijklmnopqrstuvwxyz_";
  for (std::size_t open = text.find('"'); open != std::string::npos; open = text.find('"', open + 1)) {
    const std::size_t close = text.find_first_not_of(letters, open + 1);
    if (close == std::string::npos || close == open + 1 || text[close] != '"') continue;
    std::string before;
    for (const char c : text.substr(open < 80 ? 0 : open - 80, std::min<std::size_t>(open, 80))) {
      if (c != ' ' && c != '\n') before += c;
    }
    if (makes_kind(before)) kinds.insert(text.substr(open + 1, close - open - 1));
  }
}

std::set<std::string> made() {
  std::set<std::string> kinds;
  for (const char* folder : {"runtime", "compiler/driver"}) {
    for (const auto& entry : fs::recursive_directory_iterator(source_root() / folder)) {
      if (entry.path().extension() == ".cpp") collect_kinds(read_file(entry.path()), kinds);
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
