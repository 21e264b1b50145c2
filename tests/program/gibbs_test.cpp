// Under davies every state ends in the Gibbs state of the bath's temperature (Commun. Math. Phys. 39,
// 91 (1974)): chips of the examples and others, held long at several s.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/program/process.h"

using namespace tarn::testing;
namespace fs = std::filesystem;

namespace {

/// hbar/kB in mK for a frequency of 1 GHz: 1 GHz h/kB, of the exact SI values of h and kB.
const double kMilliKelvin = 6.62607015e-34 * 1e9 / 1.380649e-23 * 1e3;

/// The text of an example up to its experiments.
std::string chip_of(const std::string& example) {
  const std::string text = read_file(source_root() / "examples" / example);
  const auto experiments = text.find("\nexperiment ");
  REQUIRE(experiments != std::string::npos);
  return text.substr(0, experiments + 1);
}

/// A long hold at several s; all levels and their populations.
std::string held(const std::string& chip, const std::string& letters, const std::string& time, const std::string& places) {
  const std::size_t levels = std::size_t{1} << letters.size();
  std::string text = "parameter place = 0.5 in 0 .. 1\nexperiment hold_there {\n chip " + chip + "\n begin state(\"" + letters +
                     "\")\n pace start place, hold for " + time + "\n equation davies\n tolerance 1e-11\n";
  for (std::size_t k = 0; k < levels; ++k) {
    const std::string n = std::to_string(k);
    text += " observe p" + n + " = population(level(" + n + ")) at end\n observe E" + n + " = E(" + n + ") in [GHz] at end\n";
  }
  return text + " observe total = population(any) at end\n observe ground_set = population(ground) at end\n" +
         " sweep place over list(" + places + ")\n}\n";
}

/// Where level k coincides with others: how many they are together, and the first of them.
struct Group {
  std::size_t first, count;
};

Group group_of(const std::vector<double>& energy, std::size_t k) {
  const auto same = [&](std::size_t j) { return std::abs(energy[j] - energy[k]) < 1e-9 * (energy.back() - energy.front()); };
  Group group{k, 1};
  while (group.first > 0 && same(group.first - 1)) --group.first, ++group.count;
  while (group.first + group.count < energy.size() && same(group.first + group.count)) ++group.count;
  return group;
}

/// One row against the Gibbs weights at `temperature` [mK]; a level counts with those it coincides with.
void check_row(const Csv& csv, std::size_t row, std::size_t levels, double temperature) {
  std::vector<double> energy(levels), weight(levels);
  double partition = 0, sum = 0;
  for (std::size_t k = 0; k < levels; ++k) {
    energy[k] = csv.number(row, "E" + std::to_string(k) + " [GHz]");
    partition += weight[k] = std::exp(-(energy[k] - energy[0]) * kMilliKelvin / temperature);
  }
  for (std::size_t k = 0; k < levels; ++k) {
    const Group group = group_of(energy, k);
    const double population = csv.number(row, "p" + std::to_string(k));
    INFO("s = " << csv.number(row, "place") << ", level " << k << " at " << energy[k] - energy[0] << " GHz, one of " << group.count);
    CHECK(std::abs(population - static_cast<double>(group.count) * weight[k] / partition) < 1e-10);
    if (group.first == k) sum += population;
  }
  CHECK(csv.number(row, "ground_set") == Approx(csv.number(row, "p0")).margin(1e-15));
  CHECK(sum == Approx(csv.number(row, "total")).margin(1e-14));
  CHECK(sum == Approx(1).margin(1e-11));
}

/// Runs the model in `scratch` and checks every row.
void check_gibbs(const Scratch& scratch, std::size_t qubits, double temperature, std::size_t rows) {
  const Outcome outcome = run_tarn({"run", "m.tarn", "--out", "out"}, scratch.path());
  INFO(outcome.err);
  REQUIRE(outcome.status == 0);
  // All levels are kept: nothing can leave them.
  CHECK(outcome.out.find("left the levels kept") == std::string::npos);
  const Csv csv = read_csv(scratch.path() / "out/hold_there/results.csv");
  REQUIRE(csv.rows.size() == rows);
  for (std::size_t row = 0; row < rows; ++row) check_row(csv, row, std::size_t{1} << qubits, temperature);
}

}  // namespace

TEST_CASE("a ring with a weak link ends in its Gibbs state") {
  const Scratch scratch;
  fs::copy_file(source_root() / "examples/02_weak_link/curves.csv", scratch.path() / "curves.csv");
  scratch.write("m.tarn", chip_of("02_weak_link/weak_link.tarn") + held("ring(n = 4, last = weak)", "01+0", "1 ms", "0.1, 0.3, 0.45"));
  check_gibbs(scratch, 4, 15, 3);
}

TEST_CASE("a chain with offsets ends in its Gibbs state") {
  const Scratch scratch;
  for (const char* table : {"chip.csv", "curves.csv"}) {
    fs::copy_file(source_root() / "examples/03_pause_with_offsets" / table, scratch.path() / table);
  }
  scratch.write("m.tarn", chip_of("03_pause_with_offsets/pause.tarn") + held("chain", "010", "1 ms", "0, 0.25, 0.5"));
  check_gibbs(scratch, 3, 12, 3);
}

/// Own chips: one density, one temperature.
const char* const kOwn = R"(
use spectra
bath warm { density spectra.ohmic(strength = 1e-3, cutoff = 8 GHz)  temperature 30 mK }
schedule A(s) = 4 GHz*(1 - s) + 0.8 GHz
schedule B(s) = 3 GHz*s
qubit site(h : number) {
    energy -A(s)/2*X + B(s)/2*h*Z
    noise X, Z ~ warm
}
coupler link { energy -B(s)/2*ZZ }
chip alike { qubit q[i] : site(h = 0.4) for i in 0 .. 2 }
chip ring {
    qubit   q[i] : site(h = 0) for i in 0 .. 3
    coupler q[i] -- q[mod(i + 1, 4)] : link for i in 0 .. 3
}
)";

TEST_CASE("identical qubits that are not joined end in their Gibbs state") {
  // Levels of one, two and of all three excitations: degenerate, their mixture even.
  const Scratch scratch;
  scratch.write("m.tarn", kOwn + held("alike", "01+", "20 us", "0, 0.5, 1"));
  check_gibbs(scratch, 3, 30, 3);
}

TEST_CASE("a ring that is its own mirror image under all flips ends in its Gibbs state") {
  const Scratch scratch;
  scratch.write("m.tarn", kOwn + held("ring", "0111", "100 us", "0, 0.4, 0.8"));
  check_gibbs(scratch, 4, 30, 3);
}
