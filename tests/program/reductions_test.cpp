// lowest() and others of a scan beside what changes from s to s.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/program/process.h"

using namespace tarn::testing;

TEST_CASE("an observable of a scan that reads its lowest gap has a value at every s") {
  const Scratch scratch;
  scratch.write("m.tarn",
                "qubit site { energy -1 GHz*(1 - s)*X - 0.5 GHz*(2*s - 1)*Z }\nchip one { qubit q : site }\n"
                "experiment run { chip one scan s over linear(0, 1, 5) observe gap in [GHz]\n"
                " observe above = gap - lowest(gap) in [GHz]\n observe share = s*lowest(gap)/1 GHz\n"
                " observe least = lowest(gap) in [GHz]\n expect above > -1 MHz\n expect above > 0.2 GHz where s <= 0.5 }\n");
  const Outcome outcome = run_tarn({"run", "m.tarn", "--out", "out"}, scratch.path());
  INFO(outcome.out << outcome.err);
  REQUIRE(outcome.status == 0);
  const Csv csv = read_csv(scratch.path() / "out/run/results.csv");
  REQUIRE(csv.rows.size() == 5);
  const double least = std::sqrt(0.5);  // at s = 0.75, of the five
  for (std::size_t row = 0; row < 5; ++row) {
    const double s = csv.number(row, "s");
    // One qubit by hand: the gap is the length of its field.
    const double gap = std::hypot(2 * (1 - s), 2 * s - 1);
    CHECK(csv.number(row, "above [GHz]") == Approx(gap - least).margin(1e-12));
    CHECK(csv.number(row, "share") == Approx(s * least).margin(1e-12));
    CHECK(csv.number(row, "least [GHz]") == Approx(least).epsilon(1e-12));
  }
}

// One instant at which levels coincide is no reason to lose the others.
TEST_CASE("where levels coincide a gap and a coherence have no value, and only there") {
  const Scratch scratch;
  scratch.write("m.tarn", "qubit site { energy -s*1 GHz/2*X }\nchip one { qubit q : site }\n"
                          "experiment trace { chip one begin state(\"0\") pace ramp to 1 over 5 ns equation schroedinger\n"
                          " observe c = coherence(0, 1) along 3\n observe z = mean(Z(q)) along 3 }\n"
                          "experiment gaps { chip one observe g = gap scan s over linear(0, 1, 3) }\n");
  const Outcome outcome = run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path());
  INFO(outcome.err);
  CHECK(outcome.status == 0);
  CHECK(outcome.err.find("levels 0 and 1 coincide, so that their coherence has no value (first at s = 0)") != std::string::npos);
  const Csv trace = read_csv(scratch.path() / "r/trace/traces.csv"), levels = read_csv(scratch.path() / "r/gaps/results.csv");
  REQUIRE(trace.rows.size() == 3);
  CHECK(trace.rows[0][trace.column("c")].empty());
  CHECK(trace.number(0, "z") == Approx(1));
  CHECK(trace.number(1, "c") == Approx(0.5).margin(1e-6));  // |<0|-><+|0>| = 1/2 under any turn about X
  REQUIRE(levels.rows.size() == 3);
  CHECK(levels.rows[0][levels.column("g [GHz]")].empty());
  CHECK(levels.number(2, "g [GHz]") == Approx(1));
}
