#include <catch2/catch.hpp>

#include <set>
#include <sstream>

#include "lang/syntax/tokens.h"

using namespace tarn;

namespace {

std::vector<std::string> split(const std::string& text) {
  Diagnostics diagnostics;
  const SourceFile file = make_source({}, "t", text);
  const Tokens tokens = tokenize(file, diagnostics);
  std::vector<std::string> result;
  for (const Token& token : tokens.places) result.push_back(text.substr(token.begin, token.end - token.begin));
  return result;
}

Code only(const std::string& text) {
  Diagnostics diagnostics;
  const SourceFile file = make_source({}, "t", text);
  const Tokens tokens = tokenize(file, diagnostics);
  REQUIRE(tokens.size() == 1);
  return tokens.code(0);
}

using Words = std::vector<std::string>;

}  // namespace

TEST_CASE("reserved words are those of the reference's grammar") {
  // The words in double quotes of the grammar.
  std::istringstream grammar(
      "use parameter in spread qubit coupler schedule bath let spectrum psd function density temperature width shift "
      "band energy jump noise shared correlation for where chip offset experiment begin pace equation levels "
      "trajectories ensemble freeze observe at along scan over sweep data compare fit each expect tolerance if then "
      "else or and not when under");
  std::set<std::string> wanted;
  for (std::string word; grammar >> word;) wanted.insert(word);
  std::set<std::string> found;
  for (int code = static_cast<int>(kFirstReserved); code <= static_cast<int>(kLastReserved); ++code) {
    found.insert(std::string(spelling(static_cast<Code>(code))));
  }
  CHECK(found == wanted);
  for (const std::string& word : wanted) CHECK(is_reserved(only(word)));
  for (const char* soft : {"as", "auto", "end", "first", "follow", "hold", "is", "last", "of", "ramp", "seed", "start",
                           "step", "to", "together", "with"}) {
    CHECK(is_word(only(soft)));
    CHECK_FALSE(is_reserved(only(soft)));
  }
}

TEST_CASE("numbers leave ranges and units alone") {
  CHECK(split("0..3") == Words{"0", "..", "3"});
  CHECK(split("1.5..3") == Words{"1.5", "..", "3"});
  CHECK(split("4e-4eV") == Words{"4e-4", "eV"});
  CHECK(split("5eV 2e 1E+5") == Words{"5", "eV", "2", "e", "1E+5"});
  CHECK(split("100ns") == Words{"100", "ns"});
  CHECK(split("3%") == Words{"3", "%"});
}

TEST_CASE("symbols are read at their longest") {
  CHECK(split("a--b<=c==d!=e...f") == Words{"a", "--", "b", "<=", "c", "==", "d", "!=", "e", "..", ".", "f"});
  CHECK(split("|01><10|(q)") == Words{"|01><10|", "(", "q", ")"});
  CHECK(split("|0>") == Words{"|", "0", ">"});
}

TEST_CASE("words may be Greek, units may have a micro sign") {
  CHECK(split("\xCE\x94 = \xCF\x89_1") == Words{"\xCE\x94", "=", "\xCF\x89_1"});
  CHECK(only("\xC2\xB5s") == Code::unit_word);
  CHECK(only("\xCE\xBCPhi0") == Code::unit_word);
}

TEST_CASE("comments and white space separate, texts hold their line") {
  CHECK(split("a#b\nc##d\r\n\te") == Words{"a", "c", "e"});
  CHECK(split("\"a # b\" c") == Words{"\"a # b\"", "c"});
  CHECK(split("\xEF\xBB\xBFlet") == Words{"let"});
}
