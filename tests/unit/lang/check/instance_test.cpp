#include <catch2/catch.hpp>

#include <array>
#include <cmath>
#include <fstream>

#include "lang/check/dump.h"
#include "lang/quantities/constants.h"
#include "tests/unit/lang/check/checked.h"

using namespace tarn;
using namespace tarn::test;

namespace {

const std::string kRing = R"(
use spectra
parameter ta = 1 us
parameter eta = 4e-4 in 1e-6 .. 1e-2
parameter n : count = 4
schedule A(s) = 6 GHz*(1 - s)^2
schedule B(s) = 9 GHz*s
bath cold { density spectra.ohmic(strength = eta, cutoff = 8 GHz)  temperature 15 mK }
qubit site(h : number = 0) { energy -A(s)/2*X + B(s)/2*h*Z   noise Z ~ cold }
coupler link(J : number) { energy B(s)/2*J*ZZ }
chip ring(n : count) {
    qubit q[i] : site(h = if i == 0 then 0.1 else 0) for i in 0 .. n-1
    coupler q[i] -- q[i+1] : link(-1) for i in 0 .. n-2
    coupler q[n-1] -- q[0] : link(1)
}
)";

std::string ring(std::string_view statements) { return kRing + "experiment run { chip ring(n = n) " + std::string(statements) + " }\n"; }

double coefficient(const Instance& instance, const OperatorTerm& term, double s, double t = 0) {
  Bindings at;
  for (const ParameterUse& use : instance.parameters) at.parameters.push_back(use.value);
  at.s = s;
  at.t = t;
  return evaluate(instance.graph, term.coefficient, at) * term.factor.real();
}

/// Sum of all coefficients of a word.
double energy(const Instance& instance, Word word, double s, double t = 0) {
  double total = 0;
  for (const EnergyTerm& term : instance.energy) {
    for (const OperatorTerm& part : term.op) {
      if (part.word == word) total += coefficient(instance, part, s, t);
    }
  }
  return total;
}

constexpr double kGigahertz = 2 * kPi;  ///< [rad/ns]

}  // namespace

TEST_CASE("one driven qubit: energies, jumps, pace and observables") {
  const Instance one = instance_of(R"(
parameter f = 5 GHz     parameter a = 20 MHz in 0 MHz .. 1 GHz     parameter life = 20 us
qubit driven {
    energy -5 GHz/2 * Z + a*cos(f*t)*X
    jump   sqrt(1/life) * |0><1|
}
chip one { qubit q : driven }
experiment rabi {
    chip one   begin state("0")   pace hold for 500 ns   equation lindblad
    observe p1 = mean(|1><1|(q)) along 501
    sweep a over list(10 MHz, 20 MHz, 40 MHz)
})");
  REQUIRE(one.qubits.size() == 1);
  CHECK(energy(one, {0, 1}, 0) == Approx(-2.5 * kGigahertz));
  CHECK(energy(one, {1, 0}, 0, 0.3) == Approx(0.02 * kGigahertz * std::cos(5 * kGigahertz * 0.3)));
  REQUIRE(one.jumps.size() == 1);
  CHECK(one.jumps[0].op.size() == 2);  // |0><1| = (X + iY)/2
  CHECK(std::get<BeginStateI>(*one.begin).letters == "0");
  CHECK(evaluate(one.graph, std::get<PaceHoldI>(one.pace.at(0)).time, {}) == 500);
  CHECK(one.equations.at(0).kind == EquationKind::lindblad);
  CHECK(std::get<AlongI>(one.observables.at(0).moment).samples == 501);
  REQUIRE(one.axes.size() == 1);
  CHECK(one.axes[0].columns[0].values[1] == Approx(0.02 * kGigahertz));
  CHECK(one.axes[0].columns[0].unit.label == "MHz");
  CHECK(one.points == std::vector<std::uint64_t>{0, 1, 2});
}

TEST_CASE("a ring: bits, couplers, a bath and a copy of it for each qubit") {
  const Instance made = instance_of(ring("begin ground pace ramp to 1 over ta equation davies observe p = population(target) at end"));
  REQUIRE(made.qubits.size() == 4);
  CHECK(energy(made, {0b1000, 0}, 0.5) == Approx(-0.5 * 6 * kGigahertz * 0.25));
  CHECK(energy(made, {0, 0b1000}, 0.5) == Approx(0.5 * 9 * kGigahertz * 0.5 * 0.1));  // first placed: most significant
  CHECK(energy(made, {0, 0b0100}, 0.5) == 0);
  CHECK(energy(made, {0, 0b1100}, 1) == Approx(-4.5 * kGigahertz));
  CHECK(energy(made, {0, 0b1001}, 1) == Approx(4.5 * kGigahertz));
  CHECK(made.baths.size() == 1);
  REQUIRE(made.noise.size() == 4);
  CHECK(made.noise[0].what == "Z(q[0]) ~ cold");
  Bindings at;
  for (const ParameterUse& use : made.parameters) at.parameters.push_back(use.value);
  at.w = kGigahertz;
  CHECK(evaluate(made.graph, made.baths[0].density, at) == Approx(4e-4 * kGigahertz * std::exp(-1.0 / 8)));
  CHECK(evaluate(made.graph, made.baths[0].temperature, at) == Approx(15 * 0.130920339127).epsilon(1e-11));  // kB T/hbar, SI
}

TEST_CASE("a swept count gives a chip for each value, in grid order") {
  Checked checked = check_text(ring("scan s over linear(0, 1, 3) observe gap sweep n over list(3, 5) sweep eta over list(1e-4, 2e-4)"));
  CHECK(kinds(checked.diagnostics) == std::vector<std::string>{"changes_nothing"});  // a gap does not depend on a bath
  checked = check_text(ring("begin ground pace ramp to 1 over ta equation davies observe p = population(ground) at end "
                            "sweep ta over list(1 us, 2 us, 3 us) sweep n over list(3, 5)"));
  const auto all = instances(checked.program, 0, {}, checked.diagnostics);
  REQUIRE(all.size() == 2);
  CHECK(all[0].qubits.size() == 3);
  CHECK(all[1].qubits.size() == 5);
  CHECK(all[0].points == std::vector<std::uint64_t>{0, 2, 4});
  CHECK(all[1].points == std::vector<std::uint64_t>{1, 3, 5});
  CHECK_FALSE(all[0].axes[1].columns[0].index);
}

TEST_CASE("settings override defaults, counts included") {
  Checked checked = check_text(ring("scan s over linear(0, 1, 3) observe gap"));
  const Overrides overrides = read_overrides(checked.program, {{"n", "6"}}, checked.diagnostics);
  CHECK(instantiate(checked.program, 0, overrides, checked.diagnostics)->qubits.size() == 6);
  const Overrides idle = read_overrides(checked.program, {{"ta", "3*2 us"}}, checked.diagnostics);
  CHECK(idle.at("ta") == Approx(6000));
  const auto all = instances(checked.program, 0, idle, checked.diagnostics);
  check_overrides_used(checked.program, all, idle, checked.diagnostics);
  CHECK(kinds(checked.diagnostics) == std::vector<std::string>{"changes_nothing"});
  for (const auto& [name, text, kind] : std::vector<std::tuple<std::string, std::string, std::string>>{
           {"eta", "1", "out_of_range"}, {"ta", "3 GHz", "dimension_mismatch"}, {"tb", "3 ns", "unknown_parameter"}, {"ta", "3 ns let b = 2", "setting_form"}}) {
    Checked again = check_text(ring("scan s over linear(0, 1, 3) observe gap"));
    read_overrides(again.program, {{name, text}}, again.diagnostics);
    CHECK(kinds(again.diagnostics) == std::vector<std::string>{kind});
  }
}

TEST_CASE("a message about a setting shows the option as it was typed") {
  for (const auto& [name, text, shown] : std::vector<std::array<std::string, 3>>{
           {"ta", "3 GHz", "3 GHz"}, {"ta", "5", "5"}, {"tb", "3 ns", "tb"}, {"eta", "2*", ""}}) {
    Checked checked = check_text(ring("scan s over linear(0, 1, 3) observe gap"));
    read_overrides(checked.program, {{name, text}}, checked.diagnostics);
    REQUIRE(checked.diagnostics.all().size() == 1);
    const Span span = checked.diagnostics.all().front().span;
    CHECK(checked.program.sources().file(span.file).text == "--set " + name + "=" + text);
    CHECK(checked.program.sources().text(span) == shown);
  }
}

TEST_CASE("warnings of the check are not made again when an experiment is unrolled") {
  Checked checked = check_text(with_qubit("energy -2*pi*1 GHz/2*X"));
  CHECK(kinds(checked.diagnostics) == std::vector<std::string>{"counted_twice"});
  Diagnostics later;
  CHECK(instances(checked.program, 0, {}, later).size() == 1);
  CHECK(later.all().empty());
}

TEST_CASE("a schedule given with arguments bound is read at the kind's s") {
  const Instance made = instance_of(R"(
schedule ramp(s, high : frequency, low : frequency = 0 GHz) = low + (high - low)*s
qubit site(drive : schedule) { energy drive(s)*Z }
chip pair { qubit a : site(ramp(3 GHz, low = 1 GHz)) offset 0.25  qubit b : site(drive = ramp(high = 2 GHz)) }
experiment run { chip pair scan s over linear(0, 1, 3) observe gap })");
  for (const double s : {0.0, 0.3, 0.75}) {
    CHECK(energy(made, {0, 2}, s) == Approx(kGigahertz * (1 + 2*(s + 0.25))));
    CHECK(energy(made, {0, 1}, s) == Approx(kGigahertz * 2*s).margin(1e-12));
  }
}

TEST_CASE("a parameter without default is set by the run") {
  const std::string text = "parameter u : frequency\nparameter n : count\nqubit a { energy u*X }\n"
                           "chip c { qubit q[i] : a for i in 0 .. n-1 }\n"
                           "experiment run { chip c scan s over linear(0, 1, 3) observe gap }";
  Checked checked = check_text(text);
  CHECK(kinds(checked.diagnostics).empty());
  const Overrides both = read_overrides(checked.program, {{"u", "2 GHz"}, {"n", "3"}}, checked.diagnostics);
  CHECK(instantiate(checked.program, 0, both, checked.diagnostics)->qubits.size() == 3);
  CHECK(kinds(checked.diagnostics).empty());
  CHECK_FALSE(instantiate(checked.program, 0, {{"n", 3}}, checked.diagnostics));
  CHECK(kinds(checked.diagnostics) == std::vector<std::string>{"no_value"});
  CHECK_FALSE(instantiate(checked.program, 0, {{"u", 1}}, checked.diagnostics));
}

TEST_CASE("experiments are found by name, the only one without") {
  Checked checked = check_text(ring("scan s over linear(0, 1, 3) observe gap"));
  CHECK(find_experiment(checked.program, "run", checked.diagnostics) == 0u);
  CHECK(find_experiment(checked.program, "", checked.diagnostics) == 0u);
  CHECK_FALSE(find_experiment(checked.program, "runs", checked.diagnostics));
  CHECK(kinds(checked.diagnostics) == std::vector<std::string>{"unknown_experiment"});
}

TEST_CASE("an offset moves the s of its qubit, held within 0 and 1; couplers see all three") {
  const Instance made = instance_of(R"(
schedule B(s) = 1 GHz*s
qubit site { energy B(s)*Z + 1 MHz*X }
coupler link { energy B(s)*ZZ + B(s1)*XX + B(s2)*YY }
chip pair { qubit a : site offset 0.25  qubit b : site offset -0.1  coupler a -- b : link }
experiment run { chip pair scan s over linear(0, 1, 3) observe gap })");
  for (const double s : {0.0, 0.05, 0.5, 0.9, 1.0}) {
    const double first = std::min(s + 0.25, 1.0);
    const double second = std::max(s - 0.1, 0.0);
    CHECK(energy(made, {0, 2}, s) == Approx(kGigahertz * first));
    CHECK(energy(made, {0, 1}, s) == Approx(kGigahertz * second).margin(1e-12));
    CHECK(energy(made, {0, 3}, s) == Approx(kGigahertz * s).margin(1e-12));
    CHECK(energy(made, {3, 0}, s) == Approx(kGigahertz * first));
    CHECK(energy(made, {3, 3}, s) == Approx(kGigahertz * second).margin(1e-12));
  }
  CHECK(made.remarks.empty());  // Whether s + offset is ever held is seen along the pace of a run.
}

TEST_CASE("nested chips have paths, terms on places, kinds as arguments") {
  const Instance made = instance_of(R"(
qubit site(h : frequency, more : frequency = 1 MHz) { energy h*Z + more*X }
coupler link(J : frequency) { energy J*ZZ }
chip cell(site : qubit, link : coupler) { qubit q[i] : site for i in 0 .. 1  coupler q[0] -- q[1] : link }
chip big {
    chip c[k] : cell(site = site(h = 1 GHz*(k + 1)), link = link(2 GHz)) for k in 0 .. 1
    coupler c[0].q[1] -- c[1].q[0] : link(J = 3 GHz)
    energy 5 GHz * ZZZ(c[0].q[0], c[1].q[1], c[1].q[0])
    noise shared Z(c[k].q[0]) ~ cold for k in 0 .. 1
}
bath cold { density w1(strength = 1e-3)  temperature 20 mK }
spectrum w1(w, strength : number) = strength*w*exp(-w/5 GHz)
experiment run { chip big begin plus pace hold for 1 ns equation davies observe z = mean(ZZ(c[0].q[1], c[1].q[0])) at end })");
  REQUIRE(made.qubits.size() == 4);
  CHECK(made.qubits[3].path == "c[1].q[1]");
  CHECK(energy(made, {0, 0b1000}, 0) == Approx(1 * kGigahertz));
  CHECK(energy(made, {0, 0b0001}, 0) == Approx(2 * kGigahertz));
  CHECK(energy(made, {0, 0b0110}, 0) == Approx(3 * kGigahertz));
  CHECK(energy(made, {0, 0b1011}, 0) == Approx(5 * kGigahertz));
  REQUIRE(made.noise.size() == 1);
  CHECK(made.noise[0].op.size() == 2);
  CHECK(std::get<MeanI>(made.readings.at(0)).op.at(0).word == Word{0, 0b0110});
}

TEST_CASE("claims read observables; reductions make hidden ones") {
  const Instance made = instance_of(ring("scan s over linear(0, 1, 11) observe gap in [MHz] expect lowest(gap) > 1 MHz and gap > 0 GHz where s > 0.5"));
  REQUIRE(made.observables.size() == 2);
  CHECK(made.observables[0].unit.factor == Approx(kGigahertz / 1000));
  CHECK_FALSE(made.observables[1].shown);
  REQUIRE(made.claims.size() == 1);
  CHECK(made.graph[made.claims[0].holds].op == NodeOp::logical_and);
  CHECK(made.scan.size() == 11);
}

TEST_CASE("loops over rows and columns of a table") {
  const auto folder = std::filesystem::temp_directory_path() / "tarn_check_rows";
  std::filesystem::create_directories(folder);
  std::ofstream(folder / "edges.csv") << "a,b,J [GHz]\n0,1,-0.5\n1,2,0.25\n5,6,1\n";
  std::ofstream(folder / "h.csv") << "h\n0.5\n-1\n2\n";
  Checked checked = check_text(R"(
let h = column("h.csv", "h")
qubit site(h : number) { energy h*1 GHz*Z + 1 MHz*X }
coupler link(J : frequency) { energy J*ZZ }
chip net(n : count) {
    qubit q[i] : site(h[i]) for i in 0 .. n-1
    coupler q[a] -- q[b] : link(J) for a, b, J in rows("edges.csv") where b < n
}
experiment run { chip net(n = 3) scan s over linear(0, 1, 3) observe gap })", folder);
  const auto made = instantiate(checked.program, 0, {}, checked.diagnostics);
  REQUIRE(made);
  CHECK(energy(*made, {0, 0b100}, 0) == Approx(0.5 * kGigahertz));
  CHECK(energy(*made, {0, 0b011}, 0) == Approx(0.25 * kGigahertz));
  CHECK(energy(*made, {0, 0b110}, 0) == Approx(-0.5 * kGigahertz));
  std::filesystem::remove_all(folder);
}

TEST_CASE("dumps show the program and the instance") {
  Checked checked = check_text(ring("begin ground pace ramp to 1 over ta equation davies observe p = population(target) at end"));
  const std::string program = dump(checked.program);
  CHECK(program.find("schedule A(s : number) : a frequency") != std::string::npos);
  CHECK(program.find("experiment run {") != std::string::npos);
  const auto made = instantiate(checked.program, 0, {}, checked.diagnostics);
  CHECK(dump(*made).find("noise Z(q[2]) ~ cold: 1 Z(2)") != std::string::npos);
}
