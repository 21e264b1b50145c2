// A bath gives the same answers whether its density is recognised or only known by its values, and
// whatever stood before it in a sweep.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

/// One qubit that relaxes for 50 ns in a bath with this density; the sweep is optional.
std::string bath_model(const std::string& density, const std::string& sweep = "") {
  return "use spectra\nparameter c = 4 GHz in 1 GHz .. 9 GHz\n"
         "bath cold { density " + density + "  temperature 20 mK }\n"
         "qubit site { energy -4 GHz/2*X - 1 GHz/2*Z  noise Z ~ cold }\nchip one { qubit q : site }\n"
         "experiment trial {\n chip one\n begin state(\"0\")\n pace hold for 50 ns\n equation davies\n"
         " observe p = population(level(1)) at end\n observe x = mean(X(q)) at end\n " + sweep + "\n}\n";
}

Csv results_of_text(const std::string& text) {
  const Scratch scratch;
  scratch.write("m.tarn", text);
  const Outcome outcome = run_tarn({"run", "m.tarn", "--out", "r"}, scratch.path());
  INFO(outcome.err);
  REQUIRE(outcome.status == 0);
  return read_csv(scratch.path() / "r/trial/results.csv");
}

}  // namespace

TEST_CASE("each density of the library acts the same recognised and hidden") {
  for (const std::string density :
       {"spectra.ohmic(strength = 3e-4, cutoff = 8 GHz)", "spectra.drude(strength = 3e-4, cutoff = 6 GHz)",
        "spectra.power_law(strength = 3e-4, cutoff = 8 GHz, exponent = 2)",
        "spectra.lorentzian(strength = 3 MHz, centre = 4 GHz, breadth = 1 GHz)"}) {
    INFO(density);
    const Csv plain = results_of_text(bath_model(density));
    // A minimum with something always larger has no form that is recognised.
    const Csv hidden = results_of_text(bath_model("min(" + density + ", 100 GHz)"));
    CHECK(std::abs(plain.number(0, "p") - hidden.number(0, "p")) < 1e-8);
    CHECK(std::abs(plain.number(0, "x") - hidden.number(0, "x")) < 1e-7);
    CHECK(plain.number(0, "p") < 0.999 * 0.5 * (1 + 1 / std::sqrt(17.0)));
  }
}

TEST_CASE("a narrow density is not taken for its neighbour in a sweep") {
  const std::string narrow = "spectrum narrow(w) = 1 MHz*(w/c)*exp(-((w - c)/(20 MHz))^2)\n";
  const Csv upwards = results_of_text(narrow + bath_model("narrow", "sweep c over list(4.1 GHz, 4.123 GHz, 4.14 GHz)"));
  const Csv downwards = results_of_text(narrow + bath_model("narrow", "sweep c over list(4.14 GHz, 4.123 GHz, 4.1 GHz)"));
  for (std::size_t row = 0; row < 3; ++row) CHECK(upwards.number(row, "p") == downwards.number(2 - row, "p"));
}

TEST_CASE("the error reported for a coherence under davies covers the truth") {
  // With a bath of no strength the equation is Schroedinger's.
  const auto ramp = [](const std::string& equation, const std::string& tolerance) {
    return "use spectra\nparameter ta = 35 ns\nbath cold { density spectra.ohmic(strength = 0, cutoff = 8 GHz)  temperature 15 mK }\n"
           "qubit site { energy -3 GHz*(1 - s)/2*X - 2 GHz*s/2*Z  noise Z ~ cold }\nchip one { qubit q : site }\n"
           "experiment trial {\n chip one\n begin state(\"0\")\n pace ramp to 1 over ta\n equation " + equation +
           "\n observe x = mean(X(q)) at end\n observe z = mean(Z(q)) at end\n tolerance " + tolerance +
           "\n sweep ta over list(5 ns, 17 ns, 35 ns, 120 ns, 506 ns)\n}\n";
  };
  const Csv open = results_of_text(ramp("davies", "1e-6")), closed = results_of_text(ramp("schroedinger", "1e-9"));
  for (std::size_t row = 0; row < 5; ++row) {
    for (const std::string name : {"x", "z"}) {
      INFO(name << " at row " << row);
      const double off = std::abs(open.number(row, name) - closed.number(row, name));
      CHECK(off <= open.number(row, name + " error") + closed.number(row, name + " error"));
    }
  }
}
