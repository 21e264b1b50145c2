// What equations say of a chip that stands still: relaxation times along a scan, stationary states, windows beyond reach.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

const std::string kChip =
    "use spectra\n"
    "bath fast { density spectra.ohmic(strength = 3e-5, cutoff = 30 GHz)  temperature 15 mK }\n"
    "schedule A(s) = 3 GHz*(1 - s)\nschedule B(s) = 3 GHz*s\n"
    "qubit site { energy -A(s)/2*X - B(s)/2*Z   noise Z ~ fast }\n"
    "chip one { qubit q : site }\n";

Outcome run_text(const Scratch& scratch, const std::string& experiment) {
  scratch.write("m.tarn", kChip + experiment);
  return run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path());
}

}  // namespace

// 1/T1 = (D/Om)^2 gamma(Om) (1 + exp(-Om/kT)), 1/T2 = 1/(2 T1) + 2 (eps/Om)^2 gamma(0), gamma(0) = 2 pi eta kT:
// Quantum Dissipative Systems (World Scientific). All weak-coupling equations share them.
TEST_CASE("relaxation times along a scan are those of each place") {
  const Scratch scratch;
  const Outcome outcome = run_text(scratch, "experiment times { chip one  equation each of (davies, redfield, universal)\n"
                                            " scan s over linear(0.1, 0.9, 5)  observe T1 in [us]  observe T2 in [us] }\n");
  INFO(outcome.err);
  REQUIRE(outcome.status == 0);
  const Csv csv = read_csv(scratch.path() / "r/times/results.csv");
  REQUIRE(csv.rows.size() == 15);
  constexpr double kTheta = 0.130920339127 * 15, kEta = 3e-5;
  for (std::size_t row = 0; row < 15; ++row) {
    const double s = csv.number(row, "s"), scale = 3 * 2 * std::acos(-1.0);
    const double d = scale * (1 - s), eps = scale * s, om = std::hypot(d, eps), cutoff = 30 * 2 * std::acos(-1.0);
    const double down = 2 * std::acos(-1.0) * kEta * om * std::exp(-om / cutoff) / (1 - std::exp(-om / kTheta));
    const double t1 = 1 / (d * d / (om * om) * down * (1 + std::exp(-om / kTheta)));
    const double t2 = 1 / (0.5 / t1 + 2 * eps * eps / (om * om) * 2 * std::acos(-1.0) * kEta * kTheta);
    CHECK(csv.number(row, "T1 [us]") == Approx(t1 / 1000).epsilon(1e-3));
    CHECK(csv.number(row, "T2 [us]") == Approx(t2 / 1000).epsilon(1e-3));
  }
}

// The stationary state is Gibbs', exactly for davies (Commun. Math. Phys. 39, 91 (1974)), to the order of eta for the others.
TEST_CASE("an equation can begin in its stationary state") {
  const Scratch scratch;
  const Outcome outcome = run_text(scratch, "experiment resting { chip one  begin steady  pace start 0.4, hold for 1 ns\n"
                                            " equation each of (davies, redfield, universal, hierarchy(depth = 3))\n"
                                            " tolerance 1e-4\n observe up = population(level(1)) at end }\n");
  INFO(outcome.err);
  REQUIRE(outcome.status == 0);
  const Csv csv = read_csv(scratch.path() / "r/resting/results.csv");
  REQUIRE(csv.rows.size() == 4);
  const double om = 3 * 2 * std::acos(-1.0) * std::hypot(0.6, 0.4), thermal = 1 / (1 + std::exp(om / (0.130920339127 * 15)));
  CHECK(csv.number(0, "up") == Approx(thermal).margin(1e-8));
  for (std::size_t row = 1; row < 3; ++row) CHECK(csv.number(row, "up") == Approx(thermal).epsilon(0.02));
  // Its sums are good to a part of the largest rate, which a cold qubit's upward rate is far below: it says so.
  CHECK(std::abs(csv.number(3, "up") - thermal) <= csv.number(3, "up error"));
}

TEST_CASE("a window far beyond what can be tabulated is refused with the length that can") {
  const Scratch scratch;
  const Outcome outcome = run_text(scratch, "experiment long { chip one  begin ground  pace ramp to 1 over 10 us\n"
                                            " equation coarse_grained(window = 1 us)\n observe up = population(level(1)) at end }\n");
  CHECK(outcome.status == 3);
  CHECK(outcome.err.find("window_too_long") != std::string::npos);
  CHECK(outcome.err.find("m.tarn") != std::string::npos);
}
