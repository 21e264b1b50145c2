// The real program against published closed forms.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

const double kPi = std::acos(-1.0);

/// Runs a model of tests/program/models and reads its results.
Csv results(const std::string& model, const std::string& experiment, const std::string& file = "results.csv") {
  const Scratch scratch;
  const auto path = source_root() / "tests/program/models" / (model + ".tarn");
  const Outcome outcome = run_tarn({"run", path.string(), "--experiment", experiment, "--out", "out"}, scratch.path());
  INFO(outcome.err);
  REQUIRE(outcome.status == 0);
  return read_csv(scratch.path() / "out" / experiment / file);
}

}  // namespace

TEST_CASE("transverse-field rings have the published ground energy") {
  // Ann. Phys. 57, 79 (1970): E_0 = -sum_k sqrt(g^2 + J^2 - 2 g J cos k), k = (2m + 1) pi / n.
  const Csv csv = results("ring_levels", "ground_energy");
  REQUIRE(csv.rows.size() == 5);
  const double g = 1.3, j = 0.7;
  for (std::size_t row = 0; row < csv.rows.size(); ++row) {
    const int n = static_cast<int>(csv.number(row, "n"));
    double energy = 0;
    for (int m = 0; m < n; ++m) energy -= std::sqrt(g * g + j * j - 2 * g * j * std::cos((2 * m + 1) * kPi / n));
    CHECK(csv.number(row, "e0 [rad/ns]") == Approx(energy).epsilon(1e-11));
    if (n == 6) CHECK(energy == Approx(-8.38326570733787).epsilon(1e-14));
  }
}

TEST_CASE("unstructured search has the published gap") {
  // Phys. Rev. A 65, 042308 (2002): gap(s) = sqrt(1 - 4 (1 - 1/N) s (1 - s)), N = 8 here.
  const Csv csv = results("search", "gap_along");
  REQUIRE(csv.rows.size() == 21);
  for (std::size_t row = 0; row < csv.rows.size(); ++row) {
    const double s = csv.number(row, "s");
    const double gap = std::sqrt(1 - 4 * (1 - 1.0 / 8) * s * (1 - s));
    CHECK(csv.number(row, "gap [rad/ns]") == Approx(gap).epsilon(1e-11));
  }
}

TEST_CASE("free oscillation follows the Rabi formula") {
  // Textbook: P(t) = (D^2/Om^2) sin^2(Om t/2), Om^2 = D^2 + eps^2.
  const Csv csv = results("rabi", "free", "traces.csv");
  REQUIRE(csv.rows.size() == 93);
  for (std::size_t row = 0; row < csv.rows.size(); ++row) {
    const double eps = csv.number(row, "eps [rad/ns]"), t = csv.number(row, "t [ns]");
    const double omega = std::sqrt(1 + eps * eps);
    const double flipped = std::pow(std::sin(omega * t / 2) / omega, 2);
    CHECK(std::abs(csv.number(row, "flipped") - flipped) < 1e-8);
  }
}
