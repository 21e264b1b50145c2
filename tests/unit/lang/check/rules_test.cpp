#include <catch2/catch.hpp>

#include "tests/unit/lang/check/checked.h"

using namespace tarn;
using namespace tarn::test;

namespace {

using Kinds = std::vector<std::string>;

std::string remedy_of(std::string text) {
  const Checked checked = check_text(std::move(text));
  return checked.diagnostics.all().empty() ? "" : checked.diagnostics.all().front().remedy;
}

}  // namespace

TEST_CASE("angle is a dimension") {
  CHECK(kinds_of(with_qubit("energy 1 GHz*cos(5 GHz*t)*X")).empty());
  CHECK(kinds_of(with_qubit("energy 1 GHz*cos(pi*s*1 rad)*X")).empty());
  CHECK(kinds_of(with_qubit("energy 1 GHz*cos(pi*s)*X")) == Kinds{"dimension_mismatch"});
  CHECK(kinds_of(with_qubit("energy 1 GHz*cos(2*pi*5 GHz*t)*X")) == Kinds{"counted_twice"});
  CHECK(kinds_of(with_qubit("energy 5 [1/us]*X")) == Kinds{"dimension_mismatch"});
  CHECK(kinds_of("parameter r = 1 [1/us]\nlet x = r + 1 MHz") == Kinds{"dimension_mismatch"});
}

TEST_CASE("a dimension that does not fit is answered with the factor that mends it") {
  CHECK(remedy_of("let x = 1 ueV + 15 mK") == "multiply by `kB`");
  CHECK(remedy_of("let x = 1 ueV + 1 GHz") == "multiply by `hbar`");
  CHECK(remedy_of("let x = 1 GHz + 15 mK") == "multiply by `kB/hbar`");
  CHECK(remedy_of("let x = 1 [1/us] + 1 MHz") == "divide by `1 rad`");
  CHECK(remedy_of("let x = 1 MHz + 1 [1/us]") == "multiply by `1 rad`");
  CHECK(remedy_of(with_qubit("energy 100 nA*X")) == "multiply by a lever, a flux: the product is an energy");
  CHECK(remedy_of("parameter ta : time = 3 GHz").empty());  // No factor in [ns/GHz] is at hand anywhere.
  CHECK(remedy_of("let x = 1 ueV + 100 nA") == "multiply by a lever, a flux");
}

TEST_CASE("energies and angular rates mix in `energy`, nothing else does") {
  CHECK(kinds_of(with_qubit("energy 1 GHz*X + 2 ueV*Z")).empty());
  CHECK(kinds_of(with_qubit("energy 1 GHz*X + 15 mK*Z")) == Kinds{"dimension_mismatch"});
  CHECK(kinds_of(with_qubit("energy 1 GHz + X")) == Kinds{"wrong_operands"});
  CHECK(kinds_of(with_qubit("energy 1 GHz")) == Kinds{"wrong_kind"});
}

TEST_CASE("elementary functions and powers check their arguments") {
  CHECK(kinds_of("let x = exp(1 GHz)") == Kinds{"dimension_mismatch"});
  CHECK(kinds_of("let x = ln(2 ns/1 ns) + sqrt(4 [ns^2])/1 ns + (8 [ns^3])^(1/3)/1 ns").empty());
  CHECK(kinds_of("parameter p : number = 2\nlet x = (1 GHz)^p") == Kinds{"power_of_dimension"});
  CHECK(kinds_of("let x = min(1 GHz, 2 ns)") == Kinds{"dimension_mismatch"});
  CHECK(kinds_of("let x = clamp(1, 2)") == Kinds{"argument_count"});
  CHECK(kinds_of("let x = 1/0") == Kinds{"not_finite"});
}

TEST_CASE("schedules are finite on [0, 1] and free of operators") {
  CHECK(kinds_of("schedule f(s) = 1 GHz*ln(s)") == Kinds{"not_finite_at"});
  CHECK(kinds_of("schedule f(s) = if s > 0 then ln(s) else 0").empty());
  CHECK(kinds_of("parameter p : number = 0.5\nschedule f(s) = sqrt(p - s)") == Kinds{"not_finite_at"});
  CHECK(kinds_of("schedule f(s) = 1 GHz*X") == Kinds{"operator_not_here"});
  CHECK(kinds_of("schedule f(x) = x") == Kinds{"first_argument"});
  CHECK(kinds_of("schedule f(s) = 1 GHz*t") == Kinds{"name_not_here"});
}

TEST_CASE("names: unknown, twice, predefined, cyclic") {
  CHECK(remedy_of("parameter delta = 1 GHz\nlet x = delte") == "did you mean `delta`?");
  CHECK(kinds_of("let a = 1\nlet a = 2") == Kinds{"duplicate_name"});
  for (const char* word : {"pi", "hbar", "kB", "e", "s", "t", "exp", "gap", "any", "verdict", "XYZ", "I"}) {
    CHECK(kinds_of(fmt::format("let {} = 1", word)) == Kinds{"predefined_name"});
  }
  CHECK(kinds_of("let a = b\nlet b = a") == Kinds{"cyclic_definition"});
  CHECK(kinds_of("schedule f(s) = g(s)\nschedule g(s) = f(s)").front() == "cyclic_definition");
  CHECK(kinds_of("chip c { chip again : c }").front() == "cyclic_definition");
  CHECK(kinds_of("let x = 1\nfunction f(x : time) : time = 2*x\nlet y = f(x = 3 ns)").empty());
}

TEST_CASE("arguments: kinds, counts, missing, excess, both places shown") {
  const std::string law = "function f(x : time, k = 2) : time = x*k\n";
  CHECK(kinds_of(law + "let y = f(3 ns, k = 4)").empty());
  CHECK(kinds_of(law + "let y = f()") == Kinds{"missing_argument"});
  CHECK(kinds_of(law + "let y = f(1 ns, 2, 3)") == Kinds{"too_many_arguments"});
  CHECK(kinds_of(law + "let y = f(1 ns, x = 2 ns)") == Kinds{"argument_twice"});
  CHECK(kinds_of(law + "let y = f(1 ns, kk = 2)") == Kinds{"unknown_argument"});
  const Checked wrong = check_text(law + "let y = f(1 GHz)");
  REQUIRE(kinds(wrong.diagnostics) == Kinds{"dimension_mismatch"});
  CHECK(wrong.diagnostics.all().front().notes.size() == 1);
  const Checked inside = check_text("function g(x) = x + 1 ns\nlet y = g(1 GHz)");
  REQUIRE(kinds(inside.diagnostics) == Kinds{"dimension_mismatch"});
  CHECK_FALSE(inside.diagnostics.all().front().notes.empty());
}

TEST_CASE("parameters: dimension, range, constants only") {
  CHECK(kinds_of("parameter p : time = 3 GHz") == Kinds{"dimension_mismatch"});
  CHECK(kinds_of("parameter p = 3 GHz in 4 GHz .. 5 GHz") == Kinds{"out_of_range"});
  CHECK(kinds_of("parameter p = 3 GHz in 1 ns .. 5 ns") == Kinds{"dimension_mismatch", "dimension_mismatch"});
  CHECK(kinds_of("parameter p = 3 in 5 .. 1") == Kinds{"empty_range"});
  CHECK(kinds_of("parameter p = 3 GHz\nparameter q = 2*p") == Kinds{"constant_needed"});
  CHECK(kinds_of("parameter p") == Kinds{"parameter_needs"});
}

TEST_CASE("operators: size, Hermitian, t in noise, places") {
  CHECK(kinds_of(with_qubit("energy 1 GHz*ZZ")) == Kinds{"operator_size"});
  CHECK(kinds_of(with_qubit("energy 1 GHz*|0><1|")) == Kinds{"not_hermitian"});
  CHECK(kinds_of(with_qubit("energy 1 GHz*(|0><1| + |1><0|)")).empty());
  CHECK(kinds_of(with_qubit("energy 1 GHz*X*Z")) == Kinds{"not_hermitian"});
  CHECK(kinds_of(with_qubit("energy 1 GHz*X jump 5 [1/us]*Z")) == Kinds{"dimension_mismatch"});
  const std::string bath = "use spectra\nbath b { density spectra.drude(1e-3, 2 GHz) temperature 20 mK }\n";
  CHECK(kinds_of(bath + with_qubit("energy 1 GHz*X noise cos(1 GHz*t)*Z ~ b")) == Kinds{"name_not_here"});
  CHECK(kinds_of(bath + with_qubit("let c = cos(1 GHz*t) energy 1 GHz*X noise c*Z ~ b")) == Kinds{"name_not_here"});
  CHECK(kinds_of(bath + with_qubit("energy 1 GHz*X noise 1 nA*Z ~ b")) == Kinds{"dimension_mismatch"});
}

TEST_CASE("chips: places and couplers") {
  const std::string kinds_text = "qubit a { energy 1 GHz*X }\ncoupler l { energy 1 GHz*ZZ }\n";
  const auto chip = [&](const std::string& body) { return kinds_of(kinds_text + "chip c { " + body + " }"); };
  CHECK(chip("qubit q : a qubit q : a") == Kinds{"place_taken"});
  CHECK(chip("qubit q : a coupler q -- q : l") == Kinds{"self_coupling"});
  CHECK(chip("qubit q[i] : a for i in 0 .. 1 coupler q[0] -- q[1] : l coupler q[1] -- q[0] : l") == Kinds{"coupled_twice"});
  CHECK(chip("qubit q[i] : a for i in 0 .. 1 coupler q[0] -- q[2] : l") == Kinds{"unknown_place"});
  CHECK(chip("qubit q[i] : a for i in 0 .. -1 qubit p : a").empty());
  CHECK(chip("qubit q : l") == Kinds{"wrong_kind"});
  CHECK(chip("qubit X : a") == Kinds{"predefined_name"});
  CHECK(chip("qubit q[i] : a for i in 0 .. 3 coupler q[i] -- q[j] : l for i in 0 .. 2 for j in i+1 .. 3 where j - i != 2").empty());
}

TEST_CASE("target needs a diagonal that is not constant") {
  const std::string run = "begin ground pace ramp to 1 over 10 ns equation schroedinger observe p = population(target) at end";
  CHECK(kinds_of(with_qubit("energy 1 GHz*X", run)) == Kinds{"target_constant"});
  CHECK(kinds_of(with_qubit("energy (1 - s)*1 GHz*X + s*1 GHz*Z", run)).empty());
  CHECK(kinds_of(with_qubit("energy 1 GHz*X + s*1 GHz*Z", run)) == Kinds{"target_not_diagonal"});
}

TEST_CASE("what is swept or set must change something") {
  const std::string p = "parameter p = 1 GHz\nparameter idle = 2 GHz\n";
  CHECK(kinds_of(p + with_qubit("energy p*X", "scan s over linear(0, 1, 3) observe gap sweep idle over list(1 GHz, 2 GHz)")) == Kinds{"changes_nothing"});
  CHECK(kinds_of(p + with_qubit("energy p*X", "scan s over linear(0, 1, 3) observe gap sweep p over list(1 GHz, 2 GHz)")).empty());
}

TEST_CASE("what is not there yet is refused by one kind and never half accepted") {
  for (const char* statements : {"equation hybrid(split = 1 MHz)", "equation each of (davies, blip)", "ensemble 10", "freeze 10 seed 3",
                                 "observe h = effective_temperature", "observe r = rate(from = ground, to = any)",
                                 "observe p = population(ground when q is \"1\")", "fit p to d", "compare a with d", "expect fraction(1 > 0) > 0.5"}) {
    const auto found = kinds_of("parameter p = 1 GHz\n" + with_qubit("energy p*X", statements));
    INFO(statements);
    CHECK(std::find(found.begin(), found.end(), "not_available") != found.end());
  }
  CHECK(kinds_of("bath b { width 3 MHz shift 4 MHz }") == Kinds{"not_available", "not_available"});
}

TEST_CASE("chips of the library") {
  const std::string head = "use graphs\nuse flux\nschedule A(s) = 6 GHz*(1 - s)\nschedule B(s) = 9 GHz*s\nschedule I(s) = 1 nA\n";
  const std::string arguments = "site = flux.annealer(A, B, h = 0.1), link = flux.link(B, J = -1)";
  struct Case {
    std::string chip;
    std::size_t qubits, terms;
  };
  for (const Case& c : {Case{"chain(n = 4, ", 4, 7}, Case{"ring(n = 4, ", 4, 8}, Case{"ring(n = 2, ", 2, 3}, Case{"grid(across = 3, down = 2, ", 6, 13},
                        Case{"complete(n = 5, ", 5, 15}, Case{"star(n = 5, ", 5, 9}}) {
    std::string text = head + fmt::format("experiment run {{ chip graphs.{}{}) scan s over linear(0, 1, 3) observe gap }}", c.chip, arguments);
    text.erase(text.find("schedule I(s) = 1 nA\n"), 21);
    const Checked checked = check_text(text);
    CHECK(kinds(checked.diagnostics).empty());
    const Instance made = instance_of(text);
    CHECK(made.qubits.size() == c.qubits);
    CHECK(made.energy.size() == c.terms);
  }
  const std::string measured = R"(use flux
schedule D(s) = 2 GHz*(1 - s)  schedule Ip(s) = 100 nA*(1 + s)  schedule tilt(s) = 1 mPhi0*(2*s - 1)
chip pair { qubit q[i] : flux.measured(D, Ip, tilt) for i in 0 .. 1  coupler q[0] -- q[1] : flux.mutual(2 pH, Ip, Ip) }
experiment run { chip pair scan s over linear(0, 1, 3) observe gap })";
  CHECK(kinds_of(measured).empty());
}
