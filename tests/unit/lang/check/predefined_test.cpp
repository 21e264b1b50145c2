#include <catch2/catch.hpp>

#include <fstream>
#include <set>
#include <sstream>
#include <string>

#include "lang/check/predefined.h"

using namespace tarn;

namespace {

/// Words of the reference's table "words | are", but for the row of the operators.
std::set<std::string> words_of_reference() {
  std::ifstream in(TARN_SOURCE_ROOT "/lang/REFERENCE.md");
  std::set<std::string> words;
  bool inside = false;
  for (std::string line; std::getline(in, line);) {
    if (line == "| words | are |") inside = true;
    if (inside && line.empty()) break;
    if (!inside || !line.starts_with("| `") || line.find("| operators |") != std::string::npos) continue;
    std::istringstream row(line.substr(3, line.find("` |") - 3));
    for (std::string word; row >> word;) CHECK(words.insert(word).second);
  }
  return words;
}

}  // namespace

TEST_CASE("the reference's table of predefined words is the one the compiler has") {
  std::set<std::string> known;
  for (const std::string_view word : predefined_words()) known.emplace(word);
  CHECK(words_of_reference() == known);
  CHECK(known.size() > 40);
  for (const char* word : {"X", "ZZ", "IXY"}) CHECK(is_predefined(word));
}
