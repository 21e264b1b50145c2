// The same file gives the same bytes: whatever the number of jobs, cached or not.
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "tests/program/process.h"

using namespace tarn::testing;

namespace {

/// All files of one run of a model, joined; of run.json what may not differ from run to run.
std::string answers(const std::filesystem::path& model, const std::vector<std::string>& options,
                    const std::vector<std::string>& environment) {
  const Scratch scratch;
  std::vector<std::string> arguments{"run", model.string(), "--out", "out"};
  arguments.insert(arguments.end(), options.begin(), options.end());
  const Outcome outcome = run_tarn(arguments, scratch.path(), environment);
  INFO(outcome.out << outcome.err);
  REQUIRE(outcome.status == 0);
  std::string text;
  for (const auto& folder : std::filesystem::directory_iterator(scratch.path() / "out")) {
    for (const char* file : {"results.csv", "traces.csv", "distribution.csv"}) text += read_file(folder.path() / file);
    auto record = nlohmann::ordered_json::parse(read_file(folder.path() / "run.json"));
    REQUIRE(record.erase("machine") == 1);
    text += record.dump(1);
  }
  REQUIRE(text.size() > 100);
  return text;
}

/// The same for 1, 2 and 5 jobs, cached and not.
void check_determined(const std::filesystem::path& model, const std::vector<std::string>& options) {
  const Scratch cache;
  const std::vector<std::string> environment{"TARN_CACHE_DIR=" + (cache.path() / "kernels").string()};
  const auto with = [&](std::vector<std::string> more) {
    more.insert(more.end(), options.begin(), options.end());
    return answers(model, more, environment);
  };
  const std::string first = with({"--jobs", "1"});
  CHECK(first == with({"--jobs", "2"}));
  CHECK(first == with({"--jobs", "5"}));
  CHECK(first == with({"--no-cache"}));
}

/// Two coupled qubits in a bath of this density, driven to s = 1 in several times.
std::string two_qubits(const std::string& density, const std::string& equation) {
  return "use spectra\nparameter ta = 10 ns\nbath cold { density " + density + "  temperature 20 mK }\n"
         "qubit site { energy -3 GHz*(1 - s)/2*X - 2 GHz*s/2*Z  noise Z ~ cold  jump sqrt(0.01 [1/ns])*|0><1| }\n"
         "coupler link { energy -s*1 GHz*ZZ }\n"
         "chip two { qubit q[i] : site for i in 0 .. 1  coupler q[0] -- q[1] : link }\n"
         "experiment trial {\n chip two\n begin ground\n pace ramp to 1 over ta, hold for 5 ns\n equation " + equation +
         "\n observe p = population(target) at end\n observe z = mean(Z(q[0])) along 5\n observe distribution at end\n"
         " sweep ta over log(3 ns, 20 ns, 4)\n}\n";
}

}  // namespace

TEST_CASE("results are the same bytes for 1, 2 and 5 jobs, cached and not") {
  for (const char* example : {"01_avoided_crossing/crossing.tarn", "03_pause_with_offsets/pause.tarn"}) {
    check_determined(source_root() / "examples" / example, {"--sample", "7"});
  }
}

TEST_CASE("distributions, Lindblad and every form of a bath are the same bytes too") {
  const Scratch scratch;
  scratch.write("t.csv", "w [GHz],J [MHz]\n0.1,0.02\n2,0.4\n9,0.7\n30,0.1\n");
  const std::string table = "table(\"t.csv\", \"w [GHz]\", \"J [MHz]\", by = \"";
  const std::string ohmic = "spectra.ohmic(strength = 3e-4, cutoff = 8 GHz)";
  const std::pair<std::string, std::string> cases[] = {
      {ohmic, "lindblad"},
      {ohmic, "schroedinger"},
      {ohmic, "davies"},
      {ohmic, "davies(shift = off)"},
      {"spectra.power_law(strength = 3e-4, cutoff = 8 GHz, exponent = 2)", "davies"},
      {"spectra.drude(strength = 3e-4, cutoff = 6 GHz)", "davies"},
      {"spectra.lorentzian(strength = 3 MHz, centre = 4 GHz, breadth = 1 GHz)", "davies"},
      {"min(" + ohmic + ", 100 GHz)", "davies"},
      {"measured_linear", "davies"},
      {"measured_loglog", "davies"},
  };
  for (const auto& [density, equation] : cases) {
    INFO(density << " " << equation);
    const std::string spectra = "spectrum measured_linear(w) = " + table + "linear\")\nspectrum measured_loglog(w) = " +
                                table + "loglog\")\n";
    check_determined(scratch.write("m.tarn", spectra + two_qubits(density, equation)), {});
  }
}
