#include <catch2/catch.hpp>

#include "tests/unit/lang/check/checked.h"

using namespace tarn;
using namespace tarn::test;

namespace {

/// Ends with an error of this kind within a second; unoptimised and busy machines get more.
void ends_with(std::string text, std::string_view kind) {
  const auto before = std::chrono::steady_clock::now();
  const auto found = kinds_of(std::move(text));
  const std::chrono::duration<double> spent = std::chrono::steady_clock::now() - before;
  INFO(kind);
  CHECK(std::find(found.begin(), found.end(), kind) != found.end());
  CHECK(spent.count() < 10);
}

}  // namespace

TEST_CASE("chips beyond all bounds end in an error at once") {
  const std::string kinds_text = "qubit a { energy 1 GHz*X }\n";
  const std::string run = " begin plus pace hold for 1 ns equation schroedinger observe p = mean(Z(q[0])) at end }";
  ends_with(kinds_text + "chip c { qubit q[i] : a for i in 0 .. 59 }\nexperiment run { chip c" + run, "too_many_qubits");
  ends_with(kinds_text + "chip c { qubit q[i] : a for i in 0 .. 1000000000 }\nexperiment run { chip c" + run, "too_many_places");
}

TEST_CASE("endless loops and calls end in an error") {
  ends_with("qubit a { energy 1 GHz*X }\nchip c { qubit q : a for i in 0 .. 1000000000 for j in 0 .. 1000000000 where j < 0 }", "too_much_work");
  std::string fan = "function f0(x : number) = x*1.5 + 0.25\n";
  for (int k = 1; k < 60; ++k) fan += fmt::format("function f{}(x : number) = f{}(x) + f{}(x*2)\n", k, k - 1, k - 1);
  ends_with(fan + "let z = f59(1.5)", "too_much_work");
}

TEST_CASE("long chains of definitions and huge operators end in an error") {
  std::string lets = "let a0 = 1\n";
  for (int k = 2000; k > 0; --k) lets += fmt::format("let a{} = a{} + 1\n", k, k - 1);
  ends_with(lets, "too_much_nesting");
  std::string factors;
  for (int k = 0; k < 12; ++k) factors += fmt::format("*(X(q[{0}]) + Y(q[{0}]) + Z(q[{0}]))", k);
  ends_with("qubit a { energy 1 GHz*X }\nchip c { qubit q[i] : a for i in 0 .. 11 energy 1 GHz" + factors + " }", "operator_too_large");
}
