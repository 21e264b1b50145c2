// Commands of the real program: exit statuses, folders, interruption, stages, layout.
#include <signal.h>
#include <unistd.h>

#include <catch2/catch.hpp>
#include <chrono>
#include <map>
#include <nlohmann/json.hpp>
#include <sstream>
#include <thread>
#include <utility>

#include "tests/program/process.h"

using namespace tarn::testing;
namespace fs = std::filesystem;

namespace {

const fs::path kCrossing = source_root() / "examples/01_avoided_crossing/crossing.tarn";

/// A qubit whose flips are claimed to stay below a limit; the limit is a parameter.
const char* const kClaim =
    "parameter limit : number = 0.9 in 0 .. 1\nparameter D = 1 GHz\nqubit site { energy -D/2*X }\n"
    "chip one { qubit q : site }\nexperiment trial {\n chip one\n begin state(\"0\")\n pace hold for 0.25 ns\n"
    " equation schroedinger\n observe p = population(state(\"1\")) at end\n expect p <= limit\n}\n";

/// Many points that take long together: driven qubits over a fine grid.
const char* const kLong =
    "parameter f = 5 GHz in 1 GHz .. 9 GHz\nqubit site { energy -5 GHz/2*Z + 50 MHz*cos(f*t)*X }\n"
    "chip one { qubit q : site }\nexperiment trial {\n chip one\n begin state(\"0\")\n pace hold for 20 us\n"
    " equation schroedinger\n observe p = population(state(\"1\")) at end\n sweep f over linear(4 GHz, 6 GHz, 4000)\n}\n";

/// Every .tarn file of the checkout, and the models that the reference shows, by what they are called.
std::map<std::string, std::string> models_of_the_checkout() {
  std::map<std::string, std::string> models;
  for (const char* folder : {"examples", "stdlib", "tests"}) {
    for (const auto& entry : fs::recursive_directory_iterator(source_root() / folder)) {
      if (entry.path().extension() == ".tarn") models[entry.path().string()] = read_file(entry.path());
    }
  }
  std::istringstream lines(read_file(source_root() / "lang/REFERENCE.md"));
  std::string text;
  bool inside = false;
  for (std::string line; std::getline(lines, line);) {
    if (inside && line == "```") models["reference " + std::to_string(models.size())] = std::exchange(text, "");
    else if (inside) text += line + "\n";
    inside = line == "```tarn" || (inside && line != "```");
  }
  return models;
}

std::string without_spaces(const std::string& text) {
  std::string rest;
  for (const char c : text) {
    if (c != ' ' && c != '\n' && c != '\t' && c != '\r') rest += c;
  }
  return rest;
}

}  // namespace

TEST_CASE("exit statuses tell what happened") {
  const Scratch scratch;
  scratch.write("m.tarn", kClaim);
  CHECK(run_tarn({"run", "m.tarn", "--out", "a", "--set", "limit=1"}, scratch.path()).status == 0);
  CHECK(run_tarn({"run", "m.tarn", "--out", "b", "--set", "limit=0.1"}, scratch.path()).status == 1);
  CHECK(run_tarn({"run", "m.tarn", "--out", "c", "--set", "limit=2"}, scratch.path()).status == 2);
  CHECK(run_tarn({"run", "m.tarn", "--set", "nothing=2"}, scratch.path()).status == 2);
  scratch.write("long.tarn", kLong);
  const Outcome swept = run_tarn({"check", "long.tarn", "--set", "f=5 GHz"}, scratch.path());
  CHECK(swept.status == 2);
  CHECK(swept.err.find("set_and_swept") != std::string::npos);
  CHECK(run_tarn({"run", "m.tarn", "--wrong"}, scratch.path()).status == 2);
  CHECK(run_tarn({}, scratch.path()).status == 2);
  CHECK(run_tarn({"--help"}, scratch.path()).status == 0);
  CHECK(run_tarn({"--version"}, scratch.path()).out.find("tarn ") == 0);
}

TEST_CASE("a folder of the same key is continued, of another refused untouched") {
  const Scratch scratch;
  scratch.write("m.tarn", kClaim);
  REQUIRE(run_tarn({"run", "m.tarn", "--out", "r", "--set", "limit=1"}, scratch.path()).status == 0);
  const std::string before = read_file(scratch.path() / "r/trial/results.csv");
  CHECK(run_tarn({"run", "m.tarn", "--out", "r", "--set", "limit=1"}, scratch.path()).status == 0);
  const Outcome other = run_tarn({"run", "m.tarn", "--out", "r", "--set", "D=2 GHz"}, scratch.path());
  CHECK(other.status == 2);
  CHECK(read_file(scratch.path() / "r/trial/results.csv") == before);
  scratch.write("f/trial/notes.txt", "mine");
  CHECK(run_tarn({"run", "m.tarn", "--out", "f"}, scratch.path()).status == 2);
  CHECK(read_file(scratch.path() / "f/trial/notes.txt") == "mine");
}

TEST_CASE("an interrupted run keeps its finished rows and goes on from there") {
  const Scratch scratch;
  scratch.write("m.tarn", kLong);
  const Outcome cut = run_tarn_while({"run", "m.tarn", "--out", "r"}, scratch.path(), [](int pid) {
    std::this_thread::sleep_for(std::chrono::milliseconds(1500));
    kill(pid, SIGINT);
  });
  INFO(cut.err);
  CHECK(cut.status == 3);
  const Csv part = read_csv(scratch.path() / "r/trial/results.csv");
  REQUIRE(part.rows.size() < 4000);
  const Outcome limited = run_tarn({"run", "m.tarn", "--out", "r", "--time-limit", "1s"}, scratch.path());
  CHECK(limited.status == 3);
  CHECK(limited.seconds < 10);
  CHECK(read_csv(scratch.path() / "r/trial/results.csv").rows.size() >= part.rows.size());
}

TEST_CASE("another value of a parameter compiles nothing") {
  const Scratch scratch;
  scratch.write("m.tarn", kClaim);
  const std::vector<std::string> cache{"TARN_CACHE_DIR=" + (scratch.path() / "kernels").string()};
  const Outcome first = run_tarn({"run", "m.tarn", "--out", "a", "--timings", "--set", "limit=1"}, scratch.path(), cache);
  CHECK(first.err.find("1 compiled") != std::string::npos);
  const Outcome second =
      run_tarn({"run", "m.tarn", "--out", "b", "--timings", "--set", "limit=1", "--set", "D=1.5 GHz"}, scratch.path(), cache);
  CHECK(second.err.find("0 compiled, 1 from the cache") != std::string::npos);
}

TEST_CASE("diagnostics as JSON lines are objects with place and kind") {
  const Scratch scratch;
  scratch.write("m.tarn", "parameter a : time = 3 GHz\nparameter b : frequency = 1 ns\n");
  const Outcome outcome = run_tarn({"check", "m.tarn", "--diagnostics", "json"}, scratch.path());
  CHECK(outcome.status == 2);
  std::istringstream lines(outcome.err);
  std::size_t count = 0;
  for (std::string line; std::getline(lines, line); ++count) {
    const auto object = nlohmann::json::parse(line);
    CHECK(object.at("file") == "m.tarn");
    CHECK(object.at("severity") == "error");
    CHECK(object.at("line").get<std::size_t>() == count + 1);
  }
  CHECK(count == 2);
}

TEST_CASE("every stage of compilation is shown") {
  for (const char* stage : {"syntax", "program", "instance", "plan", "ir", "llvm", "asm", "header", "object"}) {
    const Outcome outcome = run_tarn({"emit", kCrossing.string(), "--stage", stage});
    INFO(stage << ": " << outcome.err);
    CHECK(outcome.status == 0);
    CHECK(outcome.out.size() > 100);
  }
  CHECK(run_tarn({"emit", kCrossing.string(), "--stage", "soup"}).status == 2);
}

TEST_CASE("tidy changes layout only, and nothing the second time, on every model of the checkout") {
  std::size_t tidied_models = 0;
  for (const auto& [name, text] : models_of_the_checkout()) {
    INFO(name);
    const Scratch scratch;
    const fs::path original = scratch.write("n.tarn", text);
    const Outcome once = run_tarn({"tidy", "n.tarn"}, scratch.path());
    if (once.status != 0) {
      // Texts that are shown to be refused, and those alone: they say so themselves.
      CHECK((text.find("#! ") != std::string::npos || name.ends_with("modules/faulty.tarn")));
      CHECK(once.out.empty());
      continue;
    }
    ++tidied_models;
    scratch.write("m.tarn", once.out);
    CHECK(run_tarn({"tidy", "m.tarn"}, scratch.path()).out == once.out);
    CHECK(without_spaces(once.out) == without_spaces(text));
    const Outcome before = run_tarn({"emit", "n.tarn", "--stage", "syntax"}, scratch.path());
    const Outcome after = run_tarn({"emit", "m.tarn", "--stage", "syntax"}, scratch.path());
    CHECK(before.status == after.status);
    CHECK(before.out == after.out);
    REQUIRE(run_tarn({"tidy", "--in-place", "n.tarn"}, scratch.path()).status == 0);
    CHECK(read_file(original) == once.out);
  }
  CHECK(tidied_models > 20);
}

TEST_CASE("explain shows terms, levels, gap and structure") {
  const Outcome outcome = run_tarn({"explain", kCrossing.string()});
  REQUIRE(outcome.status == 0);
  for (const char* part : {"X(q)", "Z(q)", "smallest gap 0.1 GHz at s = 0.5", "real", "crossing"}) {
    INFO(part << "\n" << outcome.out);
    CHECK(outcome.out.find(part) != std::string::npos);
  }
}

TEST_CASE("on a terminal the run shows its progress, and messages have colour unless NO_COLOR is set") {
  const Scratch scratch;
  scratch.write("m.tarn", kClaim);
  const Outcome shown = run_tarn_on_terminal({"run", kCrossing.string(), "--out", "r"}, scratch.path());
  INFO(shown.err);
  CHECK(shown.status == 0);
  CHECK(shown.err.find("crossing: 13 of 13 points") != std::string::npos);
  CHECK(shown.err.find(" s left") != std::string::npos);
  CHECK(shown.err.ends_with("\r\033[K"));  // the line is taken away at the end
  CHECK(shown.out.find('\033') == std::string::npos);
  const std::vector<std::string> wrong{"run", "m.tarn", "--jbos", "3"};
  CHECK(run_tarn_on_terminal(wrong, scratch.path()).err.find("\033[1;31m") != std::string::npos);
  CHECK(run_tarn_on_terminal(wrong, scratch.path(), {"NO_COLOR=1"}).err.find('\033') == std::string::npos);
  const Outcome lines = run_tarn_on_terminal({"run", "m.tarn", "--out", "j", "--diagnostics", "json"}, scratch.path());
  CHECK(lines.err.find("points") == std::string::npos);  // no progress among JSON lines
}

TEST_CASE("what killed compilations left in the cache goes, what others write stays") {
  const Scratch scratch;
  scratch.write("m.tarn", kClaim);
  const fs::path cache = scratch.path() / "kernels";
  fs::create_directory(cache);
  fs::permissions(cache, fs::perms::owner_all);
  const auto old = fs::file_time_type::clock::now() - std::chrono::hours(2);
  for (const char* name : {"abc.1.0.tmp", "abc.1.0.tmp.so"}) fs::last_write_time(scratch.write(std::string("kernels/") + name, "x"), old);
  fs::last_write_time(scratch.write("kernels/old.so", "x"), old);
  scratch.write("kernels/def.2.0.tmp", "x");
  const std::vector<std::string> environment{"TARN_CACHE_DIR=" + cache.string()};
  REQUIRE(run_tarn({"run", "m.tarn", "--out", "r", "--set", "limit=1"}, scratch.path(), environment).status == 0);
  CHECK_FALSE(fs::exists(cache / "abc.1.0.tmp"));
  CHECK_FALSE(fs::exists(cache / "abc.1.0.tmp.so"));
  CHECK(fs::exists(cache / "def.2.0.tmp"));
  CHECK(fs::exists(cache / "old.so"));
}

TEST_CASE("nothing is coloured or written over where no terminal looks") {
  const Scratch scratch;
  const Outcome outcome = run_tarn({"run", kCrossing.string(), "--out", "r"}, scratch.path());
  CHECK(outcome.status == 0);
  CHECK((outcome.out + outcome.err).find('\033') == std::string::npos);
}
