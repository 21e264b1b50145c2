// Every example runs as its first lines promise: its claims hold, its files are there.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

/// Runs an example in a scratch folder; its claims decide the status.
void run_example(const std::string& name, const Scratch& scratch, const std::vector<std::string>& options = {}) {
  std::vector<std::string> arguments{"run", (source_root() / "examples" / name).string(), "--out", "out"};
  arguments.insert(arguments.end(), options.begin(), options.end());
  const Outcome outcome = run_tarn(arguments, scratch.path());
  INFO(outcome.out << outcome.err);
  REQUIRE(outcome.status == 0);
}

}  // namespace

TEST_CASE("one qubit misses its avoided crossing as published") {
  // Proc. R. Soc. A 137, 696 (1932): exp(-pi D^2 / 2v).
  const Scratch scratch;
  run_example("01_avoided_crossing/crossing.tarn", scratch);
  const Csv csv = read_csv(scratch.path() / "out/crossing/results.csv");
  REQUIRE(csv.rows.size() == 13);
  for (std::size_t row = 0; row < csv.rows.size(); ++row) {
    const double d = 0.1 * 2 * std::acos(-1.0), v = 20 * 2 * std::acos(-1.0) / csv.number(row, "ta [ns]");
    const double expected = std::exp(-std::acos(-1.0) * d * d / (2 * v));
    CHECK(std::abs(csv.number(row, "missed") - expected) < 1e-3);
    CHECK(csv.number(row, "expected") == Approx(expected).epsilon(1e-12));
    CHECK(csv.number(row, "missed error") < 1e-6);
  }
}

TEST_CASE("a ring with a weak link relaxes to its target when annealed slowly") {
  const Scratch scratch;
  run_example("02_weak_link/weak_link.tarn", scratch, {"--experiment", "speed", "--sample", "4"});
  run_example("02_weak_link/weak_link.tarn", scratch, {"--experiment", "levels_along"});
  CHECK(read_csv(scratch.path() / "out/levels_along/results.csv").rows.size() == 96);
}

TEST_CASE("a pause repairs a fast ramp where the gap is small") {
  const Scratch scratch;
  run_example("03_pause_with_offsets/pause.tarn", scratch);
  const Csv csv = read_csv(scratch.path() / "out/pausing/results.csv");
  CHECK(csv.rows.size() == 28);
}

TEST_CASE("a closed ring of ten qubits equals its exact solution") {
  // Phys. Rev. Lett. 95, 245701 (2005); examples/04_exact_ring/exact.csv.
  const Scratch scratch;
  run_example("04_exact_ring/ring.tarn", scratch);
  const Csv csv = read_csv(scratch.path() / "out/against_exact/results.csv");
  REQUIRE(csv.rows.size() == 7);
  for (std::size_t row = 0; row < csv.rows.size(); ++row) {
    CHECK(std::abs(csv.number(row, "ground_population") - csv.number(row, "exact")) < 2e-6);
  }
}

TEST_CASE("one qubit under every equation keeps to the exact answer at weak coupling") {
  // Reference: the hierarchy in the same run; that against closed forms in tests/physics/hierarchy.
  const Scratch scratch;
  run_example("05_all_equations/equations.tarn", scratch);
  const Csv csv = read_csv(scratch.path() / "out/relaxing/results.csv");
  REQUIRE(csv.rows.size() == 21);
  for (std::size_t row = 0; row < 7; ++row) CHECK(std::abs(csv.number(row, "up") - csv.number(0, "up")) < 5e-3);
}

TEST_CASE("a gap below the relaxation rate is beyond Davies, not beyond a window") {
  const Scratch scratch;
  run_example("06_narrow_gap/gap.tarn", scratch);
  CHECK(read_csv(scratch.path() / "out/crossing/results.csv").rows.size() == 25);
}
