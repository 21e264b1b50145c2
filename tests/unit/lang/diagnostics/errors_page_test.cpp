// lang/ERRORS.md has one line for each kind of message, and no other.
#include <catch2/catch.hpp>

#include <fstream>
#include <map>
#include <string>

#include "lang/diagnostics/diagnostics.h"

namespace {

struct Row {
  std::string meaning, remedy;
};

/// Rows "`name` — meaning — remedy".
std::map<std::string, Row> rows() {
  const std::string dash = " \xE2\x80\x94 ";
  std::map<std::string, Row> result;
  std::ifstream in(std::string(TARN_SOURCE_ROOT) + "/lang/ERRORS.md");
  std::string line;
  while (std::getline(in, line)) {
    if (!line.starts_with("- `")) continue;
    const auto close = line.find('`', 3);
    const auto first = line.find(dash, close);
    const auto second = line.find(dash, first + dash.size());
    const std::string name = line.substr(3, close - 3);
    INFO(line);
    REQUIRE(first != std::string::npos);
    REQUIRE(second != std::string::npos);
    CHECK_FALSE(result.contains(name));
    result[name] = {line.substr(first + dash.size(), second - first - dash.size()), line.substr(second + dash.size())};
  }
  return result;
}

}  // namespace

TEST_CASE("the page of messages is complete") {
  auto documented = rows();
  for (const tarn::KindInfo& kind : tarn::all_kinds()) {
    const std::string name(kind.name);
    INFO(name);
    CHECK(documented.contains(name));
    CHECK(documented[name].meaning.size() > 3);
    CHECK(documented[name].remedy.size() > 3);
    documented.erase(name);
  }
  for (const auto& [name, row] : documented) {
    INFO(name);
    CHECK(name.empty());
  }
}
