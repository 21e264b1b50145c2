// A folder of results is gone on with, whatever was run into it first: the files end as those of one run.
#include <signal.h>

#include <catch2/catch.hpp>
#include <chrono>
#include <map>
#include <nlohmann/json.hpp>
#include <thread>

#include "tests/program/process.h"

using namespace tarn::testing;
namespace fs = std::filesystem;

namespace {

const char* const kHead =
    "use spectra\nparameter f = 5 GHz in 1 GHz .. 9 GHz\nparameter n = 2 in 1 .. 4\n"
    "bath cold { density spectra.ohmic(strength = 1e-4, cutoff = 8 GHz) temperature 10 mK }\n"
    "qubit site { energy -f/2*Z + 50 MHz*cos(5 GHz*t)*X noise Z ~ cold }\n"
    "chip one(n : count = 1) { qubit q[i] : site for i in 0 .. n-1 }\n";

/// A driven qubit over a grid, with a trace, a distribution and a claim that holds.
std::string trial(const std::string& points, const std::string& hold = "40 ns") {
  return std::string(kHead) + "experiment trial {\n chip one\n begin state(\"0\")\n pace hold for " + hold +
         "\n equation schroedinger\n observe p = population(state(\"1\")) at end\n observe z = mean(Z(q[0])) along 5\n"
         " observe distribution at end\n sweep f over linear(4.8 GHz, 5.2 GHz, " + points + ")\n expect p <= 1\n}\n";
}

const char* const kSecond =
    "experiment sizes {\n chip one(n = n)\n scan s over list(0)\n observe gap\n}\n";

/// All files of a folder; run.json without what may differ from run to run.
std::map<std::string, std::string> files_of(const fs::path& folder) {
  std::map<std::string, std::string> files;
  for (const auto& entry : fs::directory_iterator(folder)) files[entry.path().filename()] = read_file(entry.path());
  auto record = nlohmann::ordered_json::parse(files.at("run.json"));
  REQUIRE(record.erase("machine") == 1);
  files["run.json"] = record.dump(1);
  return files;
}

void check_same(const fs::path& a, const fs::path& b) {
  const auto left = files_of(a), right = files_of(b);
  for (const auto& [name, text] : left) {
    INFO(a << " and " << b << ": " << name);
    REQUIRE(right.contains(name));
    CHECK(right.at(name) == text);
  }
  CHECK(left.size() == right.size());
}

void run_fine(const Scratch& scratch, std::vector<std::string> arguments, const std::string& folder = "") {
  arguments.insert(arguments.begin(), "run");
  const Outcome outcome = run_tarn(arguments, scratch.path() / folder);
  INFO(outcome.out << outcome.err);
  REQUIRE(outcome.status == 0);
}

std::size_t rows_in(const fs::path& file) { return fs::exists(file) ? read_csv(file).rows.size() : 0; }

}  // namespace

TEST_CASE("a sample is gone on with to the whole grid, and takes nothing away from it") {
  const Scratch scratch;
  scratch.write("m.tarn", trial("12"));
  run_fine(scratch, {"m.tarn", "--out", "whole"});
  run_fine(scratch, {"m.tarn", "--out", "r", "--sample", "4"});
  CHECK(rows_in(scratch.path() / "r/trial/results.csv") == 4);
  const auto record = nlohmann::json::parse(read_file(scratch.path() / "r/trial/run.json"));
  CHECK(record.at("sample") == true);
  CHECK(record.at("claims")[0].at("verdict") == "undecided");
  run_fine(scratch, {"m.tarn", "--out", "r", "--sample", "5"});
  const std::size_t both = rows_in(scratch.path() / "r/trial/results.csv");
  CHECK(both > 5);
  CHECK(both < 12);
  run_fine(scratch, {"m.tarn", "--out", "r"});
  check_same(scratch.path() / "whole/trial", scratch.path() / "r/trial");
  run_fine(scratch, {"m.tarn", "--out", "r", "--sample", "2"});
  check_same(scratch.path() / "whole/trial", scratch.path() / "r/trial");
}

TEST_CASE("an experiment run alone is gone on with by all, and a value that is the default is no other key") {
  const Scratch scratch;
  scratch.write("m.tarn", trial("3") + kSecond);
  run_fine(scratch, {"m.tarn", "--out", "whole"});
  run_fine(scratch, {"m.tarn", "--out", "r", "--experiment", "trial"});
  run_fine(scratch, {"m.tarn", "--out", "r"});
  for (const char* name : {"trial", "sizes"}) check_same(scratch.path() / "whole" / name, scratch.path() / "r" / name);
  run_fine(scratch, {"m.tarn", "--out", "n", "--set", "n=3"});
  run_fine(scratch, {"m.tarn", "--out", "n", "--set", "n=2 + 1"});
  const Outcome other = run_tarn({"run", "m.tarn", "--out", "n", "--set", "n=4"}, scratch.path());
  CHECK(other.status == 2);
  CHECK(other.err.find("count n is 3 there, 4 here") != std::string::npos);
}

TEST_CASE("where the command was given makes no difference") {
  const Scratch scratch;
  scratch.write("a/m.tarn", "use \"parts/p.tarn\" as p\n" + trial("3") + kSecond);
  scratch.write("a/parts/p.tarn", "let x = 1\n");
  run_fine(scratch, {"a/m.tarn", "--out", "r"});
  const std::string before = read_file(scratch.path() / "r/trial/results.csv");
  run_fine(scratch, {"m.tarn", "--out", "../r"}, "a");
  run_fine(scratch, {"../m.tarn", "--out", "../../r"}, "a/parts");
  run_fine(scratch, {"./a/../a/m.tarn", "--out", "r"});
  run_fine(scratch, {(scratch.path() / "a/m.tarn").string(), "--out", "r"});
  CHECK(read_file(scratch.path() / "r/trial/results.csv") == before);
  const auto key = nlohmann::json::parse(read_file(scratch.path() / "r/trial/run.json")).at("key");
  CHECK(key.at("texts")[0].at("name") == "m.tarn");
  CHECK(key.at("texts").dump().find("parts/p.tarn") != std::string::npos);
  CHECK(key.at("build").get<std::string>().size() == 16);
}

TEST_CASE("a run that was cut short and gone on with leaves the bytes of one that was not") {
  const Scratch scratch;
  scratch.write("m.tarn", trial("24", "1 us"));
  run_fine(scratch, {"m.tarn", "--out", "whole"});
  const Outcome cut = run_tarn_while({"run", "m.tarn", "--out", "r", "--jobs", "1"}, scratch.path(), [](int pid) {
    std::this_thread::sleep_for(std::chrono::milliseconds(300));
    kill(pid, SIGINT);
  });
  INFO(cut.out << cut.err);
  REQUIRE(cut.status == 3);
  CHECK(cut.err.find("error[interrupted]") != std::string::npos);
  CHECK(rows_in(scratch.path() / "r/trial/results.csv") < 24);
  // Twice the time each time: what this machine does in a second is not known.
  double seconds = 0.1;
  Outcome limited{3, "", "", 0, 0};
  for (; limited.status == 3 && seconds < 300; seconds *= 2) {
    limited = run_tarn({"run", "m.tarn", "--out", "r", "--time-limit", std::to_string(seconds) + "s"}, scratch.path());
    if (limited.status == 3) CHECK(limited.err.find("error[out_of_time]") != std::string::npos);
  }
  INFO(limited.err);
  CHECK(seconds > 0.2);
  REQUIRE(limited.status == 0);
  check_same(scratch.path() / "whole/trial", scratch.path() / "r/trial");
}

TEST_CASE("all folders are judged before anything is computed") {
  const Scratch scratch;
  scratch.write("m.tarn", trial("3") + kSecond);
  scratch.write("r/sizes/notes.txt", "mine");
  const Outcome refused = run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path());
  CHECK(refused.status == 2);
  CHECK(refused.err.find("error[foreign_file]") != std::string::npos);
  CHECK_FALSE(fs::exists(scratch.path() / "r/trial"));
  CHECK(read_file(scratch.path() / "r/sizes/notes.txt") == "mine");
  scratch.write("file", "no folder");
  const Outcome unwritable = run_tarn({"run", "m.tarn", "--out", "file/r"}, scratch.path());
  CHECK(unwritable.status == 2);
  CHECK(unwritable.err.find("error[not_written]") != std::string::npos);
  CHECK(unwritable.out.empty());
  // Writable by its permissions, but nothing can be made there: proc(5).
  const Outcome late = run_tarn({"run", "m.tarn", "--out", "/proc/results"}, scratch.path());
  CHECK(late.status == 2);
  CHECK(late.err.find("error[not_written]") != std::string::npos);
  CHECK(late.out.empty());
}

TEST_CASE("an experiment too large for the memory keeps no other from running") {
  const Scratch scratch;
  scratch.write("m.tarn", trial("3") +
                              "experiment large {\n chip one(n = 26)\n begin ground\n pace hold for 1 ns\n equation lindblad\n"
                              " observe p = population(ground) at end\n}\n" + kSecond);
  const Outcome all = run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path());
  INFO(all.out << all.err);
  CHECK(all.status == 2);
  CHECK(all.err.find("error[too_many_qubits]") != std::string::npos);
  CHECK(all.err.find("too_many_qubits", all.err.find("too_many_qubits") + 1) == std::string::npos);
  CHECK(fs::exists(scratch.path() / "r/trial/results.csv"));
  CHECK(fs::exists(scratch.path() / "r/sizes/results.csv"));
  CHECK(run_tarn({"run", "m.tarn", "--out", "r", "--experiment", "trial"}, scratch.path()).status == 0);
  CHECK(run_tarn({"run", "m.tarn", "--out", "r", "--experiment", "large"}, scratch.path()).status == 2);
  CHECK(run_tarn({"check", "m.tarn"}, scratch.path()).status == 2);
}
