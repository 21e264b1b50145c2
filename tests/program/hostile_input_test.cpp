// Whatever stands in a file, the program ends within a second and 200 MiB with a message.
#include <sys/stat.h>
#include <unistd.h>

#include <catch2/catch.hpp>
#include <random>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

#ifdef TARN_SANITIZED
constexpr double kSeconds = 20;
constexpr long kKib = 4L << 20;
#else
constexpr double kSeconds = 1;
constexpr long kKib = 200L << 10;
#endif

const char* const kOneQubit =
    "qubit site { energy -1 GHz/2*X }\nchip one { qubit q : site }\n"
    "experiment trial { chip one begin ground pace hold for 1 ns equation schroedinger observe x = mean(X(q)) at end }\n";

/// Refused with status 2 and a message, in bounds.
void check_refused(const Outcome& outcome, const std::string& part = "") {
  INFO(outcome.err.substr(0, 2000));
  CHECK(outcome.status == 2);
  CHECK(outcome.seconds < kSeconds);
  CHECK(outcome.peak_kib < kKib);
  CHECK(outcome.err.find("error") != std::string::npos);
  CHECK(outcome.err.find(part) != std::string::npos);
  CHECK(outcome.err.size() < 100000);
}

Outcome check_text(const std::string& text) {
  const Scratch scratch;
  scratch.write("m.tarn", text);
  return run_tarn({"check", "m.tarn"}, scratch.path());
}

std::string repeat(const std::string& text, std::size_t count) {
  std::string result;
  result.reserve(text.size() * count);
  for (std::size_t i = 0; i < count; ++i) result += text;
  return result;
}

}  // namespace

TEST_CASE("random bytes are refused") {
  std::mt19937 random(5);
  std::uniform_int_distribution<int> byte(0, 255);
  for (const std::size_t size : {1u, 100u, 10000u, 1000000u}) {
    std::string text;
    for (std::size_t i = 0; i < size; ++i) text += static_cast<char>(byte(random));
    check_refused(check_text(text));
  }
}

TEST_CASE("deep nesting is refused") {
  check_refused(check_text("let x = " + repeat("(", 1000000) + "1" + repeat(")", 1000000)));
  check_refused(check_text("let x = " + repeat("-", 1000000) + "1"));
  check_refused(check_text("let x = " + repeat("2^", 1000000) + "1"));
  check_refused(check_text("let x = " + repeat("if 1 == 1 then ", 300000) + "1"));
}

TEST_CASE("enormous numbers and chips are refused") {
  check_refused(check_text("parameter x = 1e999 GHz\n"));
  check_refused(check_text("parameter x = 1" + repeat("0", 5000) + "\n"));
  check_refused(check_text("qubit site { energy -1 GHz/2*X }\nchip c { qubit q[i] : site for i in 0 .. 59 }\n"
                           "experiment trial { chip c begin ground pace hold for 1 ns equation schroedinger "
                           "observe x = mean(X(q[0])) at end }\n"),
                "60 qubits");
  check_refused(check_text("qubit site { energy -1 GHz/2*X }\nchip c { qubit q[i] : site for i in 0 .. 1000000000 }\n"
                           "experiment trial { chip c scan s over list(0) observe gap }\n"));
}

TEST_CASE("cyclic definitions and imports are refused") {
  check_refused(check_text("let a = b\nlet b = a\n"));
  check_refused(check_text("schedule f(s) = f(s)\n"));
  const Scratch scratch;
  scratch.write("a.tarn", "use \"b.tarn\" as b\n");
  scratch.write("b.tarn", "use \"a.tarn\" as a\n");
  check_refused(run_tarn({"check", "a.tarn"}, scratch.path()));
}

TEST_CASE("bad tables are refused with the place in the table") {
  const std::string model =
      "schedule A(s) = table(\"t.csv\", \"s\", \"A [GHz]\", by = \"linear\")\nqubit site { energy -A(s)/2*X }\n"
      "chip one { qubit q : site }\nexperiment trial { chip one scan s over list(0, 1) observe gap }\n";
  for (const char* rows : {"0,1\n0.5,\n1,2\n", "0,1\n0.5,nan\n1,2\n", "0,1\n0.7,1\n0.5,2\n1,2\n", "0,1\nx,2\n", "0,1,2\n1,2\n"}) {
    const Scratch scratch;
    scratch.write("m.tarn", model);
    scratch.write("t.csv", std::string("s,A [GHz]\n") + rows);
    check_refused(run_tarn({"check", "m.tarn"}, scratch.path()), "t.csv");
  }
}

TEST_CASE("files that may not be read are refused") {
  const Scratch scratch;
  scratch.write("folder/m.tarn", "use \"../outside.tarn\" as o\n");
  scratch.write("outside.tarn", "let x = 1\n");
  check_refused(run_tarn({"check", "folder/m.tarn"}, scratch.path()), "also-read");
  CHECK(run_tarn({"check", "folder/m.tarn", "--also-read", "."}, scratch.path()).status == 0);
  check_refused(run_tarn({"check", "missing.tarn"}, scratch.path()), "missing.tarn");
  check_refused(run_tarn({"check", "folder"}, scratch.path()), "folder");
  std::filesystem::create_symlink("../outside.tarn", scratch.path() / "folder/link.tarn");
  scratch.write("folder/n.tarn", "use \"link.tarn\" as o\n");
  check_refused(run_tarn({"check", "folder/n.tarn"}, scratch.path()), "also-read");
}

TEST_CASE("a file that the user may not read is refused") {
  const Scratch scratch;
  const auto secret = scratch.write("secret.tarn", kOneQubit);
  scratch.write("open.tarn", kOneQubit);
  chmod(scratch.path().c_str(), 0755);
  chmod(secret.c_str(), 0);
  if (geteuid() != 0) {
    check_refused(run_tarn({"check", "secret.tarn"}, scratch.path()), "secret.tarn");
    return;
  }
  const auto readable = run_tarn_as_nobody({"check", "open.tarn"}, scratch.path());
  if (!readable || readable->status != 0) {
    WARN("not tested: root reads everything, and this process cannot become the user `nobody`");
    return;
  }
  const auto refused = run_tarn_as_nobody({"check", "secret.tarn"}, scratch.path());
  REQUIRE(refused);
  check_refused(*refused, "file_unreadable");
}

TEST_CASE("an empty file, a BOM and CRLF are fine") {
  CHECK(check_text("").status == 0);
  CHECK(check_text("\xef\xbb\xbf" + std::string(kOneQubit)).status == 0);
  std::string dos;
  for (const char c : std::string(kOneQubit)) dos += c == '\n' ? std::string("\r\n") : std::string(1, c);
  CHECK(check_text(dos).status == 0);
}
