// README.md and --help tell of the same commands and options, and what README shows comes out so.
#include <catch2/catch.hpp>

#include <regex>
#include <set>
#include <sstream>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

std::set<std::string> matches(const std::string& text, const std::regex& form) {
  std::set<std::string> found;
  for (std::sregex_iterator match(text.begin(), text.end(), form), end; match != end; ++match) found.insert((*match)[1]);
  return found;
}

std::set<std::string> options_in(const std::string& text) {
  static const std::regex kOption(R"((?:^|[^-\w])(--[a-z][a-z-]*))");
  return matches(text, kOption);
}

const std::set<std::string> kCommands = {"check", "explain", "run", "tidy", "emit"};

std::string readme() { return read_file(source_root() / "README.md"); }

/// The text between the fence after `head` and the next.
std::string fenced(const std::string& text, const std::string& head) {
  const std::size_t from = text.find("```", text.find(head)) + 3, begin = text.find('\n', from) + 1;
  return text.substr(begin, text.find("```", begin) - begin);
}

}  // namespace

TEST_CASE("README and --help name the same commands and options") {
  std::set<std::string> helped;
  const Outcome top = run_tarn({"--help"});
  REQUIRE(top.status == 0);
  for (const std::string& option : options_in(top.out)) helped.insert(option);
  for (const std::string& command : kCommands) {
    CHECK(top.out.find("\n  " + command + " ") != std::string::npos);
    const Outcome help = run_tarn({command, "--help"});
    REQUIRE(help.status == 0);
    for (const std::string& option : options_in(help.out)) helped.insert(option);
  }
  CHECK(helped.contains("--time-limit"));
  CHECK(options_in(readme()) == helped);
  static const std::regex kCommand(R"(\| `tarn ([a-z]+) )");
  CHECK(matches(readme(), kCommand) == kCommands);
}

TEST_CASE("README's first model is the example, and its output is what comes out") {
  const std::string shown = fenced(readme(), "comments left out");
  std::string plain;
  std::istringstream lines(read_file(source_root() / "examples/01_avoided_crossing/crossing.tarn"));
  for (std::string line; std::getline(lines, line);) {
    line.erase(std::min(line.find('#'), line.size()));
    line.erase(line.find_last_not_of(' ') + 1);
    if (!line.empty()) plain += line + "\n";
  }
  const Scratch scratch;
  const auto syntax = [&](const std::string& name, const std::string& text) {
    scratch.write(name + "/m.tarn", text);
    return run_tarn({"emit", "m.tarn", "--stage", "program"}, scratch.path() / name).out;
  };
  CHECK(syntax("a", shown) == syntax("b", plain));
  const Outcome run = run_tarn({"run", (source_root() / "examples/01_avoided_crossing/crossing.tarn").string()}, scratch.path());
  REQUIRE(run.status == 0);
  std::istringstream output(fenced(readme(), "Angle is a dimension"));
  std::string line;
  std::getline(output, line);
  CHECK(line == "$ build/bin/tarn run examples/01_avoided_crossing/crossing.tarn");
  while (std::getline(output, line)) {
    INFO(line << "\n" << run.out);
    if (line != "...") CHECK(run.out.find(line + "\n") != std::string::npos);
  }
}
