// Equations with their options, what is compared, and what goes with them, as an instance holds it.
// What the words mean is the project's own language: no outside source.
#include <catch2/catch.hpp>
#include <cmath>

#include "tests/unit/lang/check/checked.h"

using namespace tarn;
using namespace tarn::test;

namespace {

const std::string kHead =
    "use spectra\nparameter c = 0.5 in -1 .. 1\nparameter blur = 2 ns in 1 ns .. 9 ns\nparameter ta = 10 ns\n"
    "bath cold { density spectra.drude(strength = 1e-3, cutoff = 2 GHz) temperature 20 mK }\n"
    "qubit site { energy -2 GHz*(1 - s)*X + 2 GHz*s*Z noise Z ~ cold }\n"
    "qubit quiet { energy -2 GHz*(1 - s)*X }\n"
    "chip one { qubit q : site }\n"
    "chip row { qubit q[i] : quiet for i in 0 .. 2 noise X(q[0]) ~ cold "
    "noise Z(q[k]) ~ cold for k in 0 .. 2 correlation(i, j) = c^abs(i - j) }\n";

std::string experiment(const std::string& statements) { return kHead + "experiment run { " + statements + " }\n"; }

Instance moving(const std::string& equation, const std::string& more = "") {
  return instance_of(experiment("chip one begin ground pace ramp to 1 over ta " + equation + " observe p = population(ground) at end " + more));
}

std::vector<double> values(const Instance& instance, const std::vector<NodeId>& nodes) {
  Bindings at;
  for (const ParameterUse& use : instance.parameters) at.parameters.push_back(use.value);
  std::vector<double> result;
  for (const NodeId node : nodes) result.push_back(evaluate(instance.graph, node, at));
  return result;
}

}  // namespace

TEST_CASE("each equation has the options written, and the usual ones where none are") {
  const Instance made = moving(
      "equation each of (schroedinger, lindblad, davies(shift = off), redfield, a = redfield(memory = growing), "
      "b = redfield(shift = off, memory = driven), coarse_grained, w = coarse_grained(window = 2*blur), universal, "
      "hierarchy, h = hierarchy(4), g = hierarchy(depth = 6))");
  REQUIRE(made.compares);
  REQUIRE(made.equations.size() == 12);
  const std::vector<std::string> labels = {"schroedinger", "lindblad", "davies", "redfield", "a", "b",
                                           "coarse_grained", "w", "universal", "hierarchy", "h", "g"};
  for (std::size_t k = 0; k < labels.size(); ++k) CHECK(made.equations[k].label == labels[k]);
  CHECK(made.equations[0].kind == EquationKind::schroedinger);
  CHECK(made.equations[1].kind == EquationKind::lindblad);
  CHECK(made.equations[2].kind == EquationKind::davies);
  CHECK_FALSE(made.equations[2].lamb_shift);
  CHECK(made.equations[3].kind == EquationKind::redfield);
  CHECK(made.equations[3].lamb_shift);
  CHECK(made.equations[3].memory == MemoryI::markov);
  CHECK(made.equations[4].memory == MemoryI::growing);
  CHECK(made.equations[5].memory == MemoryI::driven);
  CHECK_FALSE(made.equations[5].lamb_shift);
  CHECK(made.equations[6].kind == EquationKind::coarse_grained);
  CHECK_FALSE(made.equations[6].window);
  REQUIRE(made.equations[7].window);
  CHECK(values(made, {*made.equations[7].window}).front() == 4);
  CHECK(made.equations[8].kind == EquationKind::universal);
  CHECK(made.equations[9].kind == EquationKind::hierarchy);
  CHECK_FALSE(made.equations[9].depth);
  CHECK(made.equations[10].depth == 4);
  CHECK(made.equations[11].depth == 6);
}

TEST_CASE("one equation alone has no label") {
  const Instance made = moving("equation redfield(memory = driven)");
  CHECK_FALSE(made.compares);
  REQUIRE(made.equations.size() == 1);
  CHECK(made.equations[0].label.empty());
}

TEST_CASE("levels and trajectories") {
  const Instance made = moving("equation universal levels auto trajectories 200 seed 7");
  CHECK(made.levels_auto);
  CHECK_FALSE(made.levels);
  REQUIRE(made.trajectories);
  CHECK(made.trajectories->count == 200);
  CHECK(made.trajectories->seed == 7);
  CHECK(moving("equation universal levels 1").levels == 1);
  CHECK(moving("equation davies trajectories 5").trajectories->seed == 0);
}

TEST_CASE("a window that is swept changes something, a memory has no number") {
  CHECK(moving("equation coarse_grained(window = blur)", "sweep blur over list(1 ns, 2 ns)").points.size() == 2);
  CHECK(kinds_of(experiment("chip one begin ground pace ramp to 1 over ta equation redfield observe p = population(ground) at end "
                            "sweep blur over list(1 ns, 2 ns)")) == std::vector<std::string>{"changes_nothing"});
}

TEST_CASE("correlated copies: which they are, and their matrix") {
  const Instance made = instance_of(experiment("chip row begin plus pace hold for ta equation redfield observe p = purity at end"));
  REQUIRE(made.noise.size() == 4);
  REQUIRE(made.correlations.size() == 1);
  const CorrelationI& found = made.correlations[0];
  CHECK(found.first == 1);
  CHECK(found.count == 3);
  CHECK(found.indices == std::vector<std::string>{"k = 0", "k = 1", "k = 2"});
  CHECK(values(made, found.elements) == std::vector<double>{1, 0.5, 0.25, 0.5, 1, 0.5, 0.25, 0.5, 1});
}

TEST_CASE("a matrix of correlations may be singular but not negative") {
  // n copies with -1/(n-1) between any two are the differences from their mean: the least there can be.
  const auto copies = [](const std::string& between) {
    return kinds_of("use spectra\nbath cold { density spectra.ohmic(strength = 1e-3, cutoff = 2 GHz) temperature 20 mK }\n"
                    "qubit site { energy -2 GHz*X }\nchip row { qubit q[i] : site for i in 0 .. 3 noise Z(q[i]) ~ cold for i in 0 .. 3 "
                    "correlation(i, j) = if i == j then 1 else " + between + " }\n"
                    "experiment run { chip row begin plus pace hold for 1 ns equation redfield observe p = purity at end }\n");
  };
  using Kinds = std::vector<std::string>;
  CHECK(copies("-1/3").empty());
  CHECK(copies("1").empty());
  CHECK(copies("0").empty());
  CHECK(copies("(-1)^(i + j)").empty());  // one source with both signs
  CHECK(copies("-0.334") == Kinds{"correlation_negative"});
  CHECK(copies("if abs(i - j) == 1 then 1 else 0") == Kinds{"correlation_negative"});
  CHECK(copies("1.001") == Kinds{"correlation_negative"});
}

TEST_CASE("`under` keeps each pair of an observable and an equation once") {
  const Instance made = moving("equation each of (davies, r = redfield)",
                               "expect abs(p under r - p under davies) < 1 where p under r > 0 and verdict under r <= marginal "
                               "expect p > 0.1 and verdict <= marginal");
  REQUIRE(made.under.size() == 3);
  CHECK(made.under[0] == UnderI{1, 0});
  CHECK(made.under[1] == UnderI{0, 0});
  REQUIRE(made.observables.size() == 2);  // the verdict is made for the claims, once
  CHECK(made.under[2] == UnderI{1, 1});
  CHECK_FALSE(made.observables[1].shown);
  CHECK(std::holds_alternative<AtEndI>(made.observables[1].moment));
  CHECK(std::holds_alternative<VerdictI>(made.readings.at(made.graph[made.observables[1].value].index)));
}

TEST_CASE("relaxation times are times, of levels 0 and 1 where none are named") {
  const Instance made = instance_of(experiment("chip one equation davies observe T1 observe T2 observe x = T2(1, 0)/2 observe q = gap*T2/1 cycle"));
  REQUIRE(made.observables.size() == 4);
  CHECK(made.graph[made.observables[0].value].dimension == kTime);
  CHECK(made.observables[0].unit.label == "ns");
  CHECK(made.graph[made.observables[3].value].dimension.is_number());
  REQUIRE(made.readings.size() == 4);
  CHECK(std::holds_alternative<RelaxationI>(made.readings[0]));
  const auto& usual = std::get<DephasingI>(made.readings[1]);
  CHECK((usual.row == 0 && usual.column == 1));
  const auto& other = std::get<DephasingI>(made.readings[2]);
  CHECK((other.row == 1 && other.column == 0));
}
