// The real program against published closed forms.
#include <catch2/catch.hpp>
#include <cmath>
#include <complex>

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

TEST_CASE("a ring where both terms are alike tends to -4 J/pi a spin") {
  // Ann. Phys. 57, 79 (1970). Finite rings differ by even powers of 1/n: two steps of extrapolation leave about n^-6.
  const Csv csv = results("ring_levels", "per_spin");
  REQUIRE(csv.rows.size() == 3);
  const double e3 = csv.number(0, "spin [rad/ns]"), e6 = csv.number(1, "spin [rad/ns]"), e12 = csv.number(2, "spin [rad/ns]");
  const double coarse = (4 * e6 - e3) / 3, fine = (4 * e12 - e6) / 3;
  CHECK((16 * fine - coarse) / 15 == Approx(-4 / kPi).epsilon(1e-5));
  CHECK(std::abs(e12 + 4 / kPi) > 1e-3);
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

// Rev. Mod. Phys. 59, 1 (1987): the renormalised tunnelling amplitude at T = 0, to first order in alpha = 2 eta, is
// D (1 + alpha (ln(D/wc) + 0.57721566)), with an exponential cut-off and D << wc. Quantum Dissipative Systems
// (World Scientific): the oscillation decays with 1/(2 T1), 1/T1 = pi alpha D exp(-D/wc) at T = 0.
TEST_CASE("the Lamb shift slows tunnelling as published, and `shift = off` leaves it out") {
  const auto at_end = [](const std::string& equation) {
    const Scratch scratch;
    scratch.write("m.tarn", "use spectra\nbath cold { density spectra.ohmic(strength = 1e-4, cutoff = 50 GHz)  temperature 1 mK }\n"
                            "qubit site { energy -1 GHz/2*X  noise Z ~ cold }\nchip one { qubit q : site }\n"
                            "experiment trial {\n chip one\n begin state(\"0\")\n pace hold for 100 ns\n equation " + equation +
                            "\n observe z = mean(Z(q)) at end\n observe y = mean(Y(q)) at end\n}\n");
    const Outcome outcome = run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path());
    INFO(outcome.err);
    REQUIRE(outcome.status == 0);
    const Csv results = read_csv(scratch.path() / "r/trial/results.csv");
    return std::complex<double>(results.number(0, "z"), results.number(0, "y"));  // turns as exp(i D t): D t is 100 cycles
  };
  const double d = 2 * kPi, cutoff = 50 * d, alpha = 2e-4;
  const std::complex<double> with = at_end("davies"), without = at_end("davies(shift = off)");
  const double amplitude = std::exp(-kPi * alpha * d * std::exp(-d / cutoff) * 100 / 2);
  CHECK(std::arg(without) == Approx(0).margin(1e-9));
  CHECK(std::abs(without) == Approx(amplitude).epsilon(1e-9));
  CHECK(std::arg(with) == Approx(alpha * d * (std::log(d / cutoff) + 0.57721566) * 100).epsilon(2e-3));
  CHECK(std::abs(with) == Approx(amplitude).epsilon(1e-9));
}
