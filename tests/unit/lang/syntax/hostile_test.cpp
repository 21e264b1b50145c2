// Whatever the text holds, parsing ends soon, in little memory and little stack.
#include <catch2/catch.hpp>

#include <sys/resource.h>

#include <chrono>
#include <random>

#include "lang/diagnostics/render.h"
#include "lang/syntax/parse.h"

using namespace tarn;

namespace {

std::string repeat(std::string_view part, std::size_t count) {
  std::string text;
  for (std::size_t i = 0; i < count; ++i) text += part;
  return text;
}

struct Outcome {
  std::vector<std::string> kinds;
  double seconds = 0;
};

Outcome run(const std::string& text) {
  const auto start = std::chrono::steady_clock::now();
  SourceSet sources;
  Diagnostics diagnostics;
  parse(sources.add("hostile.tarn", text), diagnostics);
  render(diagnostics, sources);
  render_json(diagnostics, sources);
  Outcome outcome;
  for (const Diagnostic& d : diagnostics.all()) outcome.kinds.emplace_back(d.kind);
  outcome.seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
  return outcome;
}

/// One second is the language's promise for a whole run; a loaded machine gets some slack.
constexpr double kSeconds = 3;
constexpr std::size_t kMillion = 1'000'000;

void check_refused(const std::string& text, const std::string& kind) {
  const Outcome outcome = run(text);
  CHECK(outcome.kinds == std::vector<std::string>{kind});
  CHECK(outcome.seconds < kSeconds);
}

}  // namespace

TEST_CASE("a million nestings are refused at once") {
  for (const char* part : {"(", "q[", "{", "f(", "(["}) check_refused("let x = " + repeat(part, kMillion), "too_deep");
  for (const char* part : {"-", "- ", "not ", "a^", "if a then b else ", "1 - "}) {
    check_refused("let x = " + repeat(part, kMillion) + "1", "expression_too_long");
  }
  check_refused("let x = " + repeat("1+", 100'000) + "1", "expression_too_long");
  check_refused("let x = 1\n" + repeat("let x = 1\n", 200'000), "text_too_long");
}

TEST_CASE("what is just allowed is read within the stack") {
  for (const std::string& text :
       {"let x = " + repeat("(", 200) + "1" + repeat(")", 200), "let x = " + repeat("f(-a^", 190) + "1" + repeat(")", 190),
        "let x = " + repeat("a^", 900) + "a", "let x = " + repeat("if a then b else ", 900) + "1",
        "let x = " + repeat("1 + ", 900) + "1", "let x = list(" + repeat("-1, ", 50'000) + "1)"}) {
    CHECK(run(text).kinds.empty());
  }
}

TEST_CASE("characters that are no text are refused") {
  CHECK(run(std::string("let x = 1\0", 10)).kinds == std::vector<std::string>{"nul_character"});
  CHECK(run("let x = \xff").kinds == std::vector<std::string>{"not_utf8"});
  CHECK(run("# \xED\xA0\x80").kinds == std::vector<std::string>{"not_utf8"});
}

TEST_CASE("random bytes, characters and words end in messages") {
  std::mt19937 random(20240229);
  const char* words[] = {"let", "=", "x", "1", "(", ")", "{", "}", "+", "energy", "for", "in", "chip", "observe", "\"a\"",
                         ",", "GHz", "^", "[", "]", "if", "then", "else", "experiment", "qubit", ":", "~", "..", "%", "\n",
                         "#", "-", "--", "|0><1|", "use", "each", "of", "pace", "start", "when", "is", "under", "sweep", "over"};
  for (int round = 0; round < 20; ++round) {
    std::string bytes;
    std::string characters;
    std::string tokens;
    for (int i = 0; i < 20'000; ++i) {
      bytes += static_cast<char>(random() % 256);
      characters += static_cast<char>(32 + random() % 95);
      tokens += words[random() % std::size(words)];
      tokens += ' ';
    }
    for (const std::string& text : {bytes, characters, tokens}) {
      const Outcome outcome = run(text);
      CHECK_FALSE(outcome.kinds.empty());
      CHECK(outcome.seconds < kSeconds);
    }
  }
}

TEST_CASE("a long line does not make messages slow") {
  const Outcome outcome = run("experiment e { " + repeat("observe ] ", 100'000));
  CHECK(outcome.kinds.size() == Diagnostics::kMaxReports);
  CHECK(outcome.seconds < kSeconds);
}

TEST_CASE("none of this took much memory") {
  rusage usage{};
  getrusage(RUSAGE_SELF, &usage);
#if defined(__SANITIZE_ADDRESS__)
  WARN("memory is not measured under the sanitizer");
#else
  CHECK(usage.ru_maxrss < 200 * 1024);  // [KiB]
#endif
}
