#include <catch2/catch.hpp>

#include <nlohmann/json.hpp>

#include "lang/diagnostics/render.h"

using namespace tarn;

namespace {

struct Text {
  SourceSet sources;
  FileId id;
  Diagnostics diagnostics;

  explicit Text(std::string text) { id = sources.add("a.tarn", std::move(text)).id; }
  std::string mark(std::uint32_t begin, std::uint32_t end, RenderStyle style = {}) {
    diagnostics.report({id, begin, end}, diag::nul_character);
    return render(diagnostics.all().back(), sources, style);
  }
};

}  // namespace

TEST_CASE("a report shows place, kind, message and the part marked") {
  Text text("let x = 1\nlet y = 22 feet\n");
  text.diagnostics.report({text.id, 21, 25}, diag::unknown_unit, "feet")
      .remedy("write metres")
      .note({text.id, 4, 5}, "like here");
  CHECK(render(text.diagnostics, text.sources) ==
        "a.tarn:2:12-15: error[unknown_unit]: `feet` is not a unit\n"
        "    let y = 22 feet\n"
        "               ^^^^\n"
        "    remedy: write metres\n"
        "  a.tarn:1:5: like here\n"
        "    let x = 1\n"
        "        ^\n");
}

TEST_CASE("marks stand under their characters") {
  CHECK(Text("\tx y\n").mark(3, 4) == "a.tarn:1:4: error[nul_character]: the text has a NUL character\n        x y\n          ^\n");
  // Greek letters are one column wide, East Asian ones two, combining marks none.
  CHECK(Text("\xCE\xBC\xCE\xBC x").mark(5, 6).ends_with("    \xCE\xBC\xCE\xBC x\n       ^\n"));
  CHECK(Text("\xE6\xBC\xA2 x").mark(4, 5).ends_with(" x\n       ^\n"));
  CHECK(Text("a\xCC\x81 x").mark(4, 5).ends_with(" x\n      ^\n"));
}

TEST_CASE("an empty span marks its place, also at the end of the text") {
  CHECK(Text("let x").mark(5, 5).ends_with("    let x\n         ^\n"));
  CHECK(Text("ab").mark(0, 0).ends_with("    ab\n    ^\n"));
}

TEST_CASE("a span over lines is marked on its first") {
  CHECK(Text("ab cd\nef\n").mark(3, 8).ends_with("    ab cd\n       ^^\n"));
}

TEST_CASE("control characters of a text do not reach the terminal") {
  const std::string shown = Text("a\x1b[31mb \x7f x").mark(0, 1);
  CHECK(shown.find('\x1b') == std::string::npos);
  CHECK(shown.find('\x7f') == std::string::npos);
  Text text("x");
  text.diagnostics.report({text.id, 0, 1}, diag::unknown_unit, "\x1b[2J");
  CHECK(render(text.diagnostics, text.sources).find('\x1b') == std::string::npos);
}

TEST_CASE("only the part of a long line around the mark is shown") {
  const std::string shown = Text(std::string(5000, 'a') + "b" + std::string(5000, 'c')).mark(5000, 5001);
  CHECK(shown.size() < 500);
  CHECK(shown.find("ab") != std::string::npos);
}

TEST_CASE("colour only when asked") {
  const std::string plain = Text("ab").mark(0, 1);
  const std::string coloured = Text("ab").mark(0, 1, {true, 4});
  CHECK(plain.find('\x1b') == std::string::npos);
  CHECK(coloured.find("\x1b[1;31m") != std::string::npos);
}

TEST_CASE("JSON has one object a line, read back whole") {
  Text text("let \xCE\xBC = \"a\"\nx\n");
  text.diagnostics.report({text.id, 4, 6}, diag::unknown_unit, "\"\n").note({text.id, 13, 14}, "there");
  text.diagnostics.report({text.id, 13, 14}, diag::divided_unit, "a", "b").remedy("say so");
  const std::string lines = render_json(text.diagnostics, text.sources);
  REQUIRE(std::count(lines.begin(), lines.end(), '\n') == 2);
  const auto first = nlohmann::json::parse(lines.substr(0, lines.find('\n')));
  CHECK(first["kind"] == "unknown_unit");
  CHECK(first["severity"] == "error");
  CHECK(first["file"] == "a.tarn");
  CHECK(first["line"] == 1);
  CHECK(first["column"] == 5);
  CHECK(first["column_end"] == 5);
  CHECK(first["begin"] == 4);
  CHECK(first["end"] == 6);
  CHECK(first["excerpt"] == "let \xCE\xBC = \"a\"");
  CHECK(first["notes"][0]["line"] == 2);
  CHECK(first["notes"][0]["message"] == "there");
  const auto second = nlohmann::json::parse(lines.substr(lines.find('\n') + 1));
  CHECK(second["severity"] == "warning");
  CHECK(second["remedy"] == "say so");
}

TEST_CASE("JSON stays valid for a text that is not UTF-8") {
  Text text("ab\xff" "cd");
  text.diagnostics.report({text.id, 2, 3}, diag::not_utf8, 0xffU);
  CHECK_NOTHROW(nlohmann::json::parse(render_json(text.diagnostics, text.sources)));
}
