// What the program says beside its results: one format everywhere, as text and as JSON lines.
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>
#include <set>
#include <sstream>

#include "tests/program/process.h"

using namespace tarn::testing;
using nlohmann::json;

namespace {

const char* const kTrial =
    "parameter limit : number = 0.9 in 0 .. 1\nparameter D = 1 GHz\nqubit site { energy -D/2*X }\n"
    "chip one { qubit q : site }\nexperiment trial {\n chip one\n begin state(\"0\")\n pace hold for 0.25 ns\n"
    " equation schroedinger\n observe p = population(state(\"1\")) at end\n expect p <= limit\n}\n";

/// A qubit in a bath whose temperature, cut-off and time are swept by what `more` says.
std::string in_a_bath(const std::string& more) {
  return "use spectra\nparameter T = 10 mK\nparameter wc = 8 GHz\nparameter ta = 20 ns\n"
         "bath cold { density spectra.ohmic(strength = 1e-4, cutoff = wc) temperature T }\n"
         "schedule A(s) = 2 GHz*(1 - s)\nschedule B(s) = 3 GHz*s\n"
         "qubit site { energy -A(s)/2*X - B(s)/2*Z noise Z ~ cold }\nchip one { qubit q : site }\n"
         "experiment trial {\n chip one\n begin ground\n pace ramp to 1 over ta\n equation davies\n"
         " observe p = population(ground) at end\n " + more + "\n}\n";
}

/// Every line of standard error as an object; each must have the keys that all messages have.
std::vector<json> messages(const Outcome& outcome) {
  std::vector<json> objects;
  std::istringstream lines(outcome.err);
  for (std::string line; std::getline(lines, line);) {
    INFO(line);
    const json object = json::parse(line, nullptr, false);
    REQUIRE(object.is_object());
    for (const char* key : {"kind", "severity", "message", "remedy", "file"}) CHECK(object.contains(key));
    objects.push_back(object);
  }
  return objects;
}

std::vector<json> run_json(const Scratch& scratch, std::vector<std::string> arguments, int status) {
  arguments.insert(arguments.end(), {"--diagnostics", "json"});
  const Outcome outcome = run_tarn(arguments, scratch.path());
  INFO(outcome.out << outcome.err);
  CHECK(outcome.status == status);
  return messages(outcome);
}

std::set<std::string> kinds(const std::vector<json>& all) {
  std::set<std::string> names;
  for (const json& each : all) names.insert(each.at("kind").get<std::string>());
  return names;
}

}  // namespace

TEST_CASE("the command line's errors are JSON lines and name what was meant") {
  const Scratch scratch;
  scratch.write("m.tarn", kTrial);
  const std::vector<std::pair<std::vector<std::string>, std::string>> wrong = {
      {{"runn", "m.tarn"}, "`run`"},
      {{"chekc", "m.tarn"}, "`check`"},
      {{"run", "m.tarn", "--job", "2"}, "`--jobs`"},
      {{"run", "m.tarn", "--time-limt=2s"}, "`--time-limit`"},
      {{"run", "m.tarn", "--jobs", "0"}, "`0`"},
      {{"run", "m.tarn", "--sample", "1.5"}, "`1.5`"},
      {{"run", "m.tarn", "--time-limit", "soon"}, "`soon`"},
      {{"run", "m.tarn", "--time-limit", "5"}, "90s, 15min or 2h"},
      {{"run", "m.tarn", "--set", "limit"}, "`limit`"},
      {{"run", "m.tarn", "other.tarn"}, "`other.tarn`"},
      {{"check", "m.tarn", "--also-read", "nowhere"}, "`nowhere`"},
      {{"emit", "m.tarn", "--stage", "asn"}, "`asm`"},
      {{"run"}, "FILE"},
  };
  for (const auto& [arguments, part] : wrong) {
    INFO(arguments.front() << " " << arguments.back());
    const auto all = run_json(scratch, arguments, 2);
    REQUIRE(all.size() == 1);
    CHECK(all[0]["kind"] == "command_line");
    CHECK(all[0]["severity"] == "error");
    const std::string text = all[0]["message"].get<std::string>() + " " + all[0]["remedy"].get<std::string>();
    INFO(text);
    CHECK(text.find(part) != std::string::npos);
    CHECK(text.find('.') != text.size() - 1);
    const Outcome plain = run_tarn(arguments, scratch.path());
    CHECK(plain.status == 2);
    CHECK(plain.err.starts_with("tarn: error[command_line]: "));
  }
}

TEST_CASE("a refused folder, a failed claim and a missing file are JSON lines") {
  const Scratch scratch;
  scratch.write("m.tarn", kTrial);
  scratch.write("r/trial/notes.txt", "mine");
  CHECK(kinds(run_json(scratch, {"run", "m.tarn", "--out", "r"}, 2)) == std::set<std::string>{"foreign_file"});
  const auto claims = run_json(scratch, {"run", "m.tarn", "--out", "a", "--set", "limit=0.1"}, 1);
  REQUIRE(claims.size() == 1);
  CHECK(claims[0]["kind"] == "claim_fails");
  CHECK(claims[0]["file"] == "m.tarn");
  CHECK(claims[0]["line"] == 11);
  // There is one point, which has no coordinates.
  CHECK(claims[0]["message"].get<std::string>().find("closest") == std::string::npos);
  const auto other = run_json(scratch, {"run", "m.tarn", "--out", "a"}, 2);
  REQUIRE(other.size() == 1);
  CHECK(other[0]["kind"] == "other_key");
  CHECK(other[0]["message"].get<std::string>().find("parameter limit is 0.1 there, 0.9 here") != std::string::npos);
  CHECK(kinds(run_json(scratch, {"check", "missing.tarn"}, 2)) == std::set<std::string>{"file_missing"});
  CHECK(kinds(run_json(scratch, {"run", "m.tarn", "--out", "b", "--timings", "--set", "limit=1"}, 0)) ==
        std::set<std::string>{"timings"});
  scratch.write("empty.tarn", "let x = 1\n");
  CHECK(kinds(run_json(scratch, {"run", "empty.tarn"}, 2)) == std::set<std::string>{"nothing_to_run"});
}

TEST_CASE("what fails at a point stands in the user's units, once, with its place") {
  const Scratch scratch;
  scratch.write("t.tarn", in_a_bath("sweep T over list(10 mK, -5 mK, -5 mK + 0 mK)"));
  const auto cold = run_json(scratch, {"run", "t.tarn", "--out", "t"}, 3);
  REQUIRE(cold.size() == 1);
  CHECK(cold[0]["kind"] == "bad_bath");
  CHECK(cold[0]["line"] == 5);
  CHECK(cold[0]["message"].get<std::string>().find("temperature is -5 mK") != std::string::npos);
  CHECK(cold[0]["message"].get<std::string>().find("(at 2 of 3 points)") != std::string::npos);
  scratch.write("w.tarn", in_a_bath("sweep wc over list(8 GHz, -2 GHz)"));
  const auto cut = run_json(scratch, {"run", "w.tarn", "--out", "w"}, 3);
  REQUIRE(cut.size() == 1);
  CHECK(cut[0]["message"].get<std::string>().find("cutoff is -2 GHz") != std::string::npos);
  scratch.write("l.tarn", in_a_bath("sweep ta over list(20 ns, -3 ns)"));
  const auto late = run_json(scratch, {"run", "l.tarn", "--out", "l"}, 3);
  REQUIRE(late.size() == 1);
  CHECK(late[0]["kind"] == "negative_time");
  CHECK(late[0]["message"].get<std::string>().find("-3 ns") != std::string::npos);
}

TEST_CASE("zero temperature is a limit: set and swept alike") {
  // From T = 0 nothing is excited that a slow anneal does not excite itself.
  const Scratch scratch;
  scratch.write("s.tarn", in_a_bath("sweep T over list(0 mK, 10 mK)"));
  const Outcome swept = run_tarn({"run", "s.tarn", "--out", "s"}, scratch.path());
  INFO(swept.err);
  CHECK(swept.status == 0);
  scratch.write("d.tarn", in_a_bath(""));
  const Outcome set = run_tarn({"run", "d.tarn", "--out", "d", "--set", "T=0 mK"}, scratch.path());
  INFO(set.err);
  CHECK(set.status == 0);
  CHECK(read_csv(scratch.path() / "d/trial/results.csv").number(0, "p") ==
        read_csv(scratch.path() / "s/trial/results.csv").number(0, "p"));
}

TEST_CASE("a moment that never comes leaves one value empty and says so") {
  const Scratch scratch;
  scratch.write("m.tarn", in_a_bath("observe late = population(ground) at t = 50 ns\n observe half = gap at s = 0.5\n"
                                    " sweep ta over list(20 ns, 100 ns)"));
  const auto all = run_json(scratch, {"run", "m.tarn", "--out", "r"}, 0);
  REQUIRE(all.size() == 1);
  CHECK(all[0]["kind"] == "moment_never_met");
  CHECK(all[0]["severity"] == "warning");
  CHECK(all[0]["line"] == 16);
  const Csv csv = read_csv(scratch.path() / "r/trial/results.csv");
  REQUIRE(csv.rows.size() == 2);
  CHECK(csv.rows[0][csv.column("late")].empty());
  CHECK(csv.rows[0][csv.column("status")] == "moment never met");
  CHECK(csv.number(0, "p") > 0.5);
  CHECK(csv.number(0, "half [GHz]") > 1);
  CHECK(csv.rows[1][csv.column("status")] == "ok");
  CHECK(csv.number(1, "late") > 0.5);
  // Read back and written again it is the same.
  const std::string before = read_file(scratch.path() / "r/trial/results.csv");
  CHECK(run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path()).status == 0);
  CHECK(read_file(scratch.path() / "r/trial/results.csv") == before);
}

TEST_CASE("what is left out is said once, a claim on a scan says its s") {
  const Scratch scratch;
  std::string text = in_a_bath("");
  text.replace(text.find("davies"), 6, "schroedinger");
  text.replace(text.find("qubit q : site"), 14, "qubit q[i] : site for i in 0 .. 3");
  scratch.write("m.tarn", text + "experiment gaps { chip one scan s over linear(0, 1, 11) observe gap expect gap > 1 GHz }\n");
  const Outcome outcome = run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path());
  INFO(outcome.out << outcome.err);
  CHECK(outcome.status == 0);
  const auto first = outcome.err.find("left_out");
  REQUIRE(first != std::string::npos);
  CHECK(outcome.err.find("left_out", first + 1) == std::string::npos);
  CHECK(outcome.err.find("and 3 more") != std::string::npos);
  CHECK(outcome.out.find("closest at s = 0.") != std::string::npos);
  CHECK(outcome.out.find("t = 0 ns") == std::string::npos);
}

TEST_CASE("answers short of their tolerance are marked, said at the end, and no failure") {
  const Scratch scratch;
  std::string text = kTrial;
  text.insert(text.rfind('}'), " tolerance 1e-16\n");
  scratch.write("m.tarn", text);
  const Outcome outcome = run_tarn({"run", "m.tarn", "--out", "r", "--set", "limit=1"}, scratch.path());
  INFO(outcome.out << outcome.err);
  CHECK(outcome.status == 0);
  CHECK(outcome.err.find("warning[tolerance_not_reached]") != std::string::npos);
  CHECK(run_tarn({"run", "--help"}).out.find("is marked") != std::string::npos);
}
