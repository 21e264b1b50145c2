// Counts shape a chip and are compiled anew; everything else enters compiled code as a number.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

/// A transverse-field ring at one s, its size a count.
std::string ring(const std::string& statements) {
  return "parameter n = 3 in 2 .. 6\nparameter g = 1.5 GHz in 0.1 GHz .. 5 GHz\nparameter J : number = 0.4 in -1 .. 1\n"
         "qubit site { energy -g/2*X }\ncoupler link { energy J*1 GHz*ZZ }\n"
         "chip chain { qubit q[i] : site for i in 0 .. n-1\n coupler q[i] -- q[i+1] : link for i in 0 .. n-2 }\n"
         "experiment run { chip chain\n observe low = E(0) in [GHz]\n " + statements + "\n}\n";
}

/// Runs m.tarn with a cache of the folder's own; what --timings said of kernels.
std::string kernels(const Scratch& scratch, const std::string& out, const std::vector<std::string>& options = {}) {
  std::vector<std::string> arguments{"run", "m.tarn", "--timings", "--out", out};
  arguments.insert(arguments.end(), options.begin(), options.end());
  const Outcome outcome = run_tarn(arguments, scratch.path(), {"TARN_CACHE_DIR=" + (scratch.path() / "kernels").string()});
  INFO(outcome.err);
  REQUIRE(outcome.status == 0);
  const auto at = outcome.err.find("kernels: ");
  REQUIRE(at != std::string::npos);
  return outcome.err.substr(at + 9, outcome.err.find(" cache", at) - at - 3);
}

}  // namespace

TEST_CASE("a count that is set compiles anew, once for each value; a number never") {
  const Scratch scratch;
  scratch.write("m.tarn", ring(""));
  CHECK(kernels(scratch, "a") == "1 compiled, 0 from the cache");
  CHECK(kernels(scratch, "b", {"--set", "g=2 GHz", "--set", "J=-0.7"}) == "0 compiled, 1 from the cache");
  CHECK(kernels(scratch, "c", {"--set", "n=4"}) == "1 compiled, 0 from the cache");
  CHECK(kernels(scratch, "d", {"--set", "n=4", "--set", "g=900 MHz"}) == "0 compiled, 1 from the cache");
  CHECK(kernels(scratch, "e", {"--set", "n=3"}) == "0 compiled, 1 from the cache");
  CHECK(kernels(scratch, "f", {"--no-cache"}) == "1 compiled, 0 from the cache");
}

TEST_CASE("a sweep of a parameter compiles once, of a count once for each count") {
  const Scratch scratch;
  scratch.write("m.tarn", ring("sweep g over linear(1 GHz, 2 GHz, 9) sweep J over list(-0.5, 0, 0.5)"));
  CHECK(kernels(scratch, "a") == "1 compiled, 0 from the cache");
  scratch.write("m.tarn", ring("sweep g over list(1 GHz, 2 GHz) sweep n over list(2, 3, 4, 5)"));
  CHECK(kernels(scratch, "b") == "3 compiled, 1 from the cache");  // n = 3 is there already
  CHECK(kernels(scratch, "c") == "0 compiled, 4 from the cache");
  CHECK(read_file(scratch.path() / "b/run/results.csv") == read_file(scratch.path() / "c/run/results.csv"));
}

TEST_CASE("the grid of a count and a parameter has its rows in order and each its own chip") {
  const Scratch scratch;
  scratch.write("m.tarn", ring("sweep g over list(1 GHz, 2 GHz) sweep n over list(2, 4, 2 + 1)"));
  REQUIRE(kernels(scratch, "a") == "3 compiled, 0 from the cache");
  const Csv csv = read_csv(scratch.path() / "a/run/results.csv");
  REQUIRE(csv.rows.size() == 6);
  const double n[] = {2, 4, 3, 2, 4, 3};
  for (std::size_t row = 0; row < 6; ++row) {
    const double g = row < 3 ? 1 : 2, J = 0.4;
    CHECK(csv.number(row, "g [GHz]") == g);
    CHECK(csv.number(row, "n") == n[row]);
    // Two qubits by hand: in the even sector of XX, [[J, -g], [-g, -J]].
    if (n[row] == 2) CHECK(csv.number(row, "low [GHz]") == Approx(-std::sqrt(g * g + J * J)).epsilon(1e-12));
  }
  // More links in a longer chain, stronger fields: energies fall.
  CHECK(csv.number(1, "low [GHz]") < csv.number(2, "low [GHz]"));
  CHECK(csv.number(2, "low [GHz]") < csv.number(0, "low [GHz]"));
  CHECK(csv.number(4, "low [GHz]") < csv.number(1, "low [GHz]"));
}

TEST_CASE("numbers of a table are no code: another table of the same length compiles nothing") {
  const Scratch scratch;
  scratch.write("m.tarn",
                "schedule A(s) = table(\"a.csv\", \"s\", \"A [GHz]\")\nqubit site { energy -A(s)/2*X }\nchip one { qubit q : site }\n"
                "experiment run { chip one scan s over linear(0, 1, 3) observe gap in [GHz] }\n");
  scratch.write("a.csv", "s,A [GHz]\n0,5\n0.4,2\n1,1\n");
  CHECK(kernels(scratch, "a") == "1 compiled, 0 from the cache");
  scratch.write("a.csv", "s,A [GHz]\n0,3\n0.5,2.5\n1,0.5\n");
  CHECK(kernels(scratch, "b") == "0 compiled, 1 from the cache");
  const Csv csv = read_csv(scratch.path() / "b/run/results.csv");
  CHECK(csv.number(1, "gap [GHz]") == Approx(2.5).epsilon(1e-12));
}
