#include <catch2/catch.hpp>

#include <filesystem>
#include <fstream>
#include <sstream>

#include "lang/syntax/dump.h"
#include "lang/syntax/parse.h"
#include "lang/syntax/tidy.h"

namespace fs = std::filesystem;
using namespace tarn;

namespace {

std::optional<std::string> tidied(const std::string& text) {
  Diagnostics diagnostics;
  return tidy(make_source({}, "t.tarn", text), diagnostics);
}

std::string meaning(const std::string& text) {
  Diagnostics diagnostics;
  return dump(parse(make_source({}, "t.tarn", text), diagnostics));
}

std::vector<std::string> comments(const std::string& text) {
  Diagnostics diagnostics;
  const SourceFile file = make_source({}, "t.tarn", text);
  std::vector<std::string> result;
  for (const ast::Comment& c : parse(file, diagnostics).comments) {
    result.push_back(text.substr(c.span.begin, c.span.end - c.span.begin));
    result.back().erase(result.back().find_last_not_of(" \t") + 1);
  }
  return result;
}

void check_sound(const std::string& text) {
  const auto once = tidied(text);
  REQUIRE(once);
  CHECK(tidied(*once) == once);
  CHECK(meaning(*once) == meaning(text));
  CHECK(comments(*once) == comments(text));
}

}  // namespace

TEST_CASE("one layout for all texts") {
  CHECK(tidied("parameter ta=100 ns   in 1 ns..1 ms ## anneal time") ==
        "parameter ta = 100 ns in 1 ns .. 1 ms  ## anneal time\n");
  CHECK(tidied("schedule A( s,i:count )=6 GHz * ( 1-s ) ^ 2   schedule B(s) = - s") ==
        "schedule A(s, i : count) = 6 GHz*(1 - s)^2\nschedule B(s) = -s\n");
  CHECK(tidied("qubit site{energy X noise Z~c}") == "qubit site { energy X  noise Z ~ c }\n");
  CHECK(tidied("qubit site{energy X\nnoise Z~c}") == "qubit site {\n    energy X\n    noise Z ~ c\n}\n");
  CHECK(tidied("chip c { coupler q[i + 1]--q[ 0 ] : link(n - 1) for i in 0 .. n - 2 where i < n - 1 }") ==
        "chip c { coupler q[i+1] -- q[0] : link(n - 1) for i in 0 .. n-2 where i < n - 1 }\n");
  CHECK(tidied("let x = 3 [ uPhi0 ^ 2 / Hz ] +f ( a )[ 2 ]").has_value() == false);
  CHECK(tidied("let x = 3 [ uPhi0 ^ 2 / Hz ] +f ( a )*- -b") == "let x = 3 [uPhi0^2/Hz] + f(a)*- -b\n");
  CHECK(tidied("bath b {}") == "bath b {}\n");
  CHECK(tidied("") == "");
}

TEST_CASE("empty lines and comments stay, in measure") {
  CHECK(tidied("\n\n# a\n\n\n\nlet x = 1   # b   \n  # c\nlet y = 2\n\n\n") ==
        "# a\n\nlet x = 1  # b\n# c\nlet y = 2\n");
  CHECK(tidied("experiment e {\n\n  # in\n\n  levels 3\n\n  # last\n\n}\n# end") ==
        "experiment e {\n    # in\n\n    levels 3\n\n    # last\n}\n# end\n");
  CHECK(tidied("let x =\n# why\n1 +\n2") == "let x =\n    # why\n    1 +\n    2\n");
}

TEST_CASE("a text with errors is left alone") {
  Diagnostics diagnostics;
  CHECK_FALSE(tidy(make_source({}, "t.tarn", "let x = = 1"), diagnostics));
  CHECK(diagnostics.has_errors());
}

TEST_CASE("layouts of every shape keep their meaning") {
  for (const char* text : {
           "qubit a { energy X ## lost?\n }\nqubit b { energy Z }",
           "let x = 3 qubit b { let q = 4 energy X ## of q\n}",
           "chip ring(n : count, ## the number\n J : number) { } ## the ring",
           "let a = 1 let b = 2 ## of b\n## of c\nlet c = 3",
           "qubit site\n# between\n{ energy X }",
           "bath b { density j ## of b\n temperature 5 mK } # after",
           "let x = (((1)))",
           "\xEF\xBB\xBFlet x = 1\r\n# c\r\nlet y = 2\r\n",
           "experiment e { sweep together together over list(1) pace start (1), step to (2) }",
       }) {
    INFO(text);
    check_sound(text);
  }
}

TEST_CASE("every model of the house is sound after tidying") {
  std::size_t count = 0;
  for (const char* room : {"stdlib", "examples", "tests"}) {
    const fs::path root = fs::path(TARN_SOURCE_ROOT) / room;
    if (!fs::exists(root)) continue;
    for (const auto& entry : fs::recursive_directory_iterator(root)) {
      if (entry.path().extension() != ".tarn") continue;
      std::ifstream in(entry.path(), std::ios::binary);
      std::stringstream text;
      text << in.rdbuf();
      if (!tidied(text.str())) continue;  // Golden cases with errors.
      INFO(entry.path().string());
      check_sound(text.str());
      ++count;
    }
  }
  CHECK(count >= 5);
}
