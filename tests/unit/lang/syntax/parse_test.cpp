#include <catch2/catch.hpp>

#include "lang/syntax/dump.h"
#include "lang/syntax/parse.h"

using namespace tarn;

namespace {

struct Parsed {
  Diagnostics diagnostics;
  SourceFile file;
  Ast ast;
  explicit Parsed(std::string text) : file(make_source({}, "t.tarn", std::move(text))) { ast = parse(file, diagnostics); }
};

/// The value of `let x = TEXT` in prefix form.
std::string expression(const std::string& text) {
  const Parsed parsed("let x = " + text);
  INFO(text);
  CHECK_FALSE(parsed.diagnostics.has_errors());
  REQUIRE(parsed.ast.items.size() == 1);
  return dump(parsed.ast, std::get<ast::Let>(parsed.ast.items.front()).value);
}

/// Whether the statement parses inside an experiment, alone.
bool accepts(const std::string& statement) {
  const Parsed parsed("experiment e { " + statement + " }");
  return !parsed.diagnostics.has_errors() && std::get<ast::Experiment>(parsed.ast.items.front()).statements.size() == 1;
}

}  // namespace

TEST_CASE("operators bind as the grammar says") {
  CHECK(expression("1 + 2*3") == "(+ 1 (* 2 3))");
  CHECK(expression("1 - 2 - 3") == "(- (- 1 2) 3)");
  CHECK(expression("8/4/2") == "(/ (/ 8 4) 2)");
  CHECK(expression("-x^2") == "(- (^ x 2))");
  CHECK(expression("2^3^4") == "(^ 2 (^ 3 4))");
  CHECK(expression("2^-x") == "(^ 2 (- x))");
  CHECK(expression("-a*b") == "(* (- a) b)");
  CHECK(expression("a - -b") == "(- a (- b))");
  CHECK(expression("--b") == "(- (- b))");
  CHECK(expression("(a + b)*c") == "(* (+ a b) c)");
  CHECK(expression("not a and b or c") == "(or (and (not a) b) c)");
  CHECK(expression("not a < b") == "(not (< a b))");
  CHECK(expression("a + 1 <= b*2") == "(<= (+ a 1) (* b 2))");
  CHECK(expression("if a then b else if c then d else f + 1") == "(if a b (if c d (+ f 1)))");
  CHECK(expression("1 + (if a then b else c)") == "(+ 1 (if a b c))");
}

TEST_CASE("a unit is read directly after a number only") {
  CHECK(expression("5 GHz*s") == "(* 5 GHz s)");
  CHECK(expression("s*5 [1/us]") == "(* s 5 [1/us])");
  CHECK(expression("1/(2 us)") == "(/ 1 2 us)");
  CHECK(expression("(2 GHz)^2") == "(^ 2 GHz 2)");
  CHECK(expression("w[2]") == "w[2]");
  CHECK(expression("3 [ uPhi0 ^ 2 / Hz ]") == "3 [uPhi0^2/Hz]");
  CHECK(expression("2 % + 1 cycle") == "(+ 2 % 1 cycle)");
}

TEST_CASE("numbers keep value, unit and dimension") {
  const Parsed parsed("let x = 2.5e-1 mK");
  const auto& number = std::get<ast::Number>(parsed.ast.exprs.front().node);
  CHECK(number.value == 0.25);
  REQUIRE(number.unit);
  CHECK(number.unit->unit.dimension == kTemperature);
  CHECK(number.unit->unit.factor == Approx(0.130920339127));
}

TEST_CASE("paths, calls and what restricts them") {
  CHECK(expression("cell[k + 1].q[0]") == "cell[(+ k 1)].q[0]");
  CHECK(expression("f()") == "f()");
  CHECK(expression("spectra.ohmic(strength = eta, cutoff = 8 GHz)") == "spectra.ohmic(strength = eta, cutoff = 8 GHz)");
  CHECK(expression("redfield(shift = off, a == b)") == "redfield(shift = off, (== a b))");
  CHECK(expression("ground when p is \"1\" when q is \"0\" under r") ==
        "(under (when (when ground p \"1\") q \"0\") r)");
  CHECK(expression("|01><10|(q[0], q[1])") == "|01><10|(q[0], q[1])");
}

TEST_CASE("soft words are names elsewhere") {
  CHECK(expression("start + end*first - seed(to)") == "(- (+ start (* end first)) seed(to))");
  CHECK(accepts("sweep together over list(1, 2)"));
  CHECK(accepts("sweep together together over list(1, 2)"));
  CHECK(accepts("levels auto"));
  CHECK(accepts("equation each of (davies, r = redfield, of)"));
  CHECK(accepts("observe first = last at end"));
  CHECK(accepts("compare with with with"));
  CHECK(accepts("fit to, to to to each to"));
  CHECK(accepts("pace start start, ramp to to over over_1, hold for hold, step to step, follow follow"));
}

TEST_CASE("labels of compared equations") {
  const Parsed parsed("experiment e { equation each of (davies, r = redfield(memory = growing)) }");
  CHECK(dump(parsed.ast) == "experiment e\n  equation each\n    davies\n    r = redfield(memory = growing)\n");
}

TEST_CASE("texts hold counts") {
  const Parsed parsed("let x = table(\"ab{i}.csv\", \"A{k} [GHz]\")");
  CHECK_FALSE(parsed.diagnostics.has_errors());
  const auto& text = std::get<ast::Text>(parsed.ast.exprs.front().node);
  CHECK(text.literals == std::vector<std::string>{"ab", ".csv"});
  CHECK(text.inserts.front().text == "i");
  CHECK(parsed.file.text.substr(text.inserts.front().span.begin, 1) == "i");
}

TEST_CASE("spans mark what was written") {
  const Parsed parsed("let x = (a + b) * 3 GHz # c\n");
  const ast::Let& let = std::get<ast::Let>(parsed.ast.items.front());
  const auto text = [&](Span span) { return parsed.file.text.substr(span.begin, span.end - span.begin); };
  CHECK(text(let.span) == "let x = (a + b) * 3 GHz");
  CHECK(text(parsed.ast.expr(let.value).span) == "(a + b) * 3 GHz");
  const auto& product = std::get<ast::Binary>(parsed.ast.expr(let.value).node);
  CHECK(text(parsed.ast.expr(product.left).span) == "(a + b)");
  CHECK(parsed.ast.expr(product.left).parenthesised);
  CHECK(text(parsed.ast.expr(product.right).span) == "3 GHz");
}

TEST_CASE("the micro sign and the Greek letter are one name") {
  CHECK(expression("\xC2\xB5") == expression("\xCE\xBC"));
}

TEST_CASE("empty files, byte order marks and other line ends are fine") {
  for (const char* text : {"", "\n", "\xEF\xBB\xBF", "# only a comment", "\xEF\xBB\xBFlet x = 1\r\nlet y = 2\r\n"}) {
    CHECK_FALSE(Parsed(text).diagnostics.has_errors());
  }
  CHECK(Parsed("\xEF\xBB\xBFlet x = 1\r\nlet y = 2\r\n").ast.items.size() == 2);
}

TEST_CASE("a faulty statement costs no other") {
  const Parsed parsed(
      "let a = 1 +\nlet b = 2\nqubit q { energy ^ noise Z ~ c }\nexperiment e { begin begin ground levels 3 }\nlet d = 4");
  CHECK(parsed.diagnostics.error_count() == 3);
  CHECK(dump(parsed.ast) ==
        "let a 1\nlet b 2\nqubit q\n  noise ~ c\n    operator Z\nexperiment e\n  begin ground\n  levels 3\nlet d 4\n");
}

TEST_CASE("documentation belongs to its line's or the next declaration") {
  const Parsed parsed(
      "## first\n## second\nlet a = 1 ## third\nparameter b = 2 parameter c = 3 ## of c\n"
      "chip d(x : number, ## of d\n  y : number) { } ## of y\nexperiment e { ## of e\n  observe z ## of z\n  observe w }\n"
      "# not ##\n");
  CHECK(dump(parsed.ast) ==
        "let a 1\n  doc first\\nsecond\\nthird\nparameter b\n  default 2\nparameter c\n  doc of c\n  default 3\n"
        "chip d\n  doc of d\n  arg x\n    type number\n  arg y\n    doc of y\n    type number\n"
        "experiment e\n  doc of e\n  observe z\n    doc of z\n  observe w\n");
}
