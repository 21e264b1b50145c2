#include <catch2/catch.hpp>
#include <cmath>
#include <functional>

#include "compiler/ir/verify.h"
#include "compiler/passes/differentiate.h"
#include "compiler/passes/pipeline.h"
#include "tests/unit/compiler/passes/rows.h"
#include "tests/unit/compiler/support/random_module.h"
#include "tests/unit/compiler/support/reference.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;

namespace {

/// An infinite intermediate value: differences see a constant where the chain rule meets 0 times infinity.
bool passes_infinity(const Module& module, double s) {
  for (const double value : interpret(module, std::vector<double>{0.7, -0.3, 1.9}, {s, 0.4, -0.6}))
    if (std::isinf(value)) return true;
  return false;
}

const std::vector<double> kInputs{0.7, -0.3, 1.9};

double value_at(const Module& module, ValueId id, double s) { return interpret(module, kInputs, {s, 0.4, -0.6})[id.row]; }

/// Central differences of two widths, extrapolated, with the difference as their error.
struct Estimate {
  double value, error;
};
Estimate difference(const Module& module, ValueId id, double s) {
  const auto central = [&](double h) { return (value_at(module, id, s + h) - value_at(module, id, s - h)) / (2 * h); };
  const double wide = central(2e-4), narrow = central(1e-4);
  return {narrow + (narrow - wide) / 3, std::abs(narrow - wide) + 1e-7 * std::abs(narrow)};
}

Module function_of_s(const std::function<ValueId(Module&, ValueId)>& make) {
  Module module;
  module.inputs = {"a", "b", "c"};
  const ValueId s = append(module, ReadArgument{Argument::s});
  const ValueId value = make(module, s);
  module.sets.push_back({"c", {{"f", value}}, true, {}});
  return module;
}

double slope(const std::function<ValueId(Module&, ValueId)>& make, double s) {
  const Module plain = compiler::differentiate(function_of_s(make)), whole = compiler::optimize(function_of_s(make));
  REQUIRE(verify(plain).empty());
  const double a = value_at(plain, plain.sets[0].derivatives[0], s), b = value_at(whole, whole.sets[0].derivatives[0], s);
  CHECK(((std::isnan(a) && std::isnan(b)) || a == Approx(b).epsilon(1e-13)));
  return a;
}

ValueId take(Module& m, UnaryOp op, ValueId x) { return append(m, Unary{op, x}); }

}  // namespace

TEST_CASE("derivatives agree with differences on random expressions", "[passes]") {
  const unsigned seed = GENERATE(range(0u, 80u));
  Module module = random_functions(seed, 8);
  module.sets[0].differentiate = true;
  const Module derived = compiler::optimize(module);
  REQUIRE(verify(derived).empty());
  for (const double s : {0.137, 0.5512, 0.913}) {
    if (passes_infinity(module, s)) continue;
    for (std::size_t row = 0; row < derived.sets[0].functions.size(); ++row) {
      const ValueId f = derived.sets[0].functions[row].value;
      const Estimate expected = difference(derived, f, s);
      // No verdict where the function is not smooth within the difference's reach or grows too fast.
      if (!std::isfinite(expected.value) || expected.error > 1e-4 * (1 + std::abs(expected.value))) continue;
      INFO("seed " << seed << " function " << row << " s " << s);
      CHECK(value_at(derived, derived.sets[0].derivatives[row], s) == Approx(expected.value).margin(10 * expected.error + 1e-6));
    }
  }
}

TEST_CASE("derivatives of each elementary function, from a table of derivatives", "[passes]") {
  const double x = 0.3;
  const auto of = [&](UnaryOp op) { return slope([op](Module& m, ValueId s) { return take(m, op, s); }, x); };
  CHECK(of(UnaryOp::exp) == Approx(std::exp(x)));
  CHECK(of(UnaryOp::ln) == Approx(1 / x));
  CHECK(of(UnaryOp::log10) == Approx(1 / (x * std::log(10.0))));
  CHECK(of(UnaryOp::sqrt) == Approx(0.5 / std::sqrt(x)));
  CHECK(of(UnaryOp::sin) == Approx(std::cos(x)));
  CHECK(of(UnaryOp::cos) == Approx(-std::sin(x)));
  CHECK(of(UnaryOp::tan) == Approx(1 / std::pow(std::cos(x), 2)));
  CHECK(of(UnaryOp::asin) == Approx(1 / std::sqrt(1 - x * x)));
  CHECK(of(UnaryOp::acos) == Approx(-1 / std::sqrt(1 - x * x)));
  CHECK(of(UnaryOp::atan) == Approx(1 / (1 + x * x)));
  CHECK(of(UnaryOp::sinh) == Approx(std::cosh(x)));
  CHECK(of(UnaryOp::cosh) == Approx(std::sinh(x)));
  CHECK(of(UnaryOp::tanh) == Approx(1 / std::pow(std::cosh(x), 2)));
  CHECK(of(UnaryOp::floor) == 0);
}

TEST_CASE("at a kink the derivative is the right one", "[passes]") {
  const auto kinked = [](double sign) {
    return [sign](Module& m, ValueId s) { return take(m, UnaryOp::abs, join(m, BinaryOp::mul, number(m, sign), join(m, BinaryOp::sub, s, number(m, 0.5)))); };
  };
  CHECK(slope(kinked(1), 0.5) == 1);
  CHECK(slope(kinked(-3), 0.5) == 3);
  const auto least = [](Module& m, ValueId s) { return join(m, BinaryOp::min, join(m, BinaryOp::mul, number(m, 2), s), join(m, BinaryOp::add, s, number(m, 1))); };
  CHECK(slope(least, 1) == 1);
  CHECK(slope(least, 0.9) == 2);
  const auto most = [](Module& m, ValueId s) { return join(m, BinaryOp::max, join(m, BinaryOp::mul, number(m, 2), s), join(m, BinaryOp::add, s, number(m, 1))); };
  CHECK(slope(most, 1) == 2);
  // Clamp to [0, 1] written with comparisons: falling into the lower end, the value stays there.
  const auto clamped = [](double rate) {
    return [rate](Module& m, ValueId s) {
      const ValueId x = join(m, BinaryOp::mul, number(m, rate), join(m, BinaryOp::sub, s, number(m, 0.5)));
      const ValueId below = append(m, Binary{BinaryOp::less, x, number(m, 0)}, Type::truth);
      return append(m, Select{below, number(m, 0), x});
    };
  };
  CHECK(slope(clamped(2), 0.5) == 2);
  CHECK(slope(clamped(-2), 0.5) == 0);
}

TEST_CASE("a table's derivative at a knot is that of the piece to the right, at the end of the last one", "[passes]") {
  Module module;
  module.tables = {{"t", {0, 0.5, 1}, {{0, 1}, {2, -3}, {0, 0}, {0, 0}}}};
  const ValueId s = append(module, ReadArgument{Argument::s});
  module.sets.push_back({"c", {{"f", append(module, TableRead{TableId{0}, s})}}, true, {}});
  const Module derived = compiler::optimize(module);
  const auto at = [&](double x) { return interpret(derived, {}, {x, 0, 0})[derived.sets[0].derivatives[0].row]; };
  CHECK(at(0.25) == 2);
  CHECK(at(0.5) == -3);
  CHECK(at(1) == -3);
  CHECK(at(1.5) == 0);
}

TEST_CASE("where nothing moves an infinite outer derivative does no harm", "[passes]") {
  // sqrt(s^4) at 0, pow(s, 1/2) of a constant, x^y with a base of 0.
  CHECK(slope([](Module& m, ValueId s) { return take(m, UnaryOp::sqrt, join(m, BinaryOp::pow, s, number(m, 4))); }, 0) == 0);
  CHECK(slope([](Module& m, ValueId s) { return join(m, BinaryOp::pow, number(m, 0), join(m, BinaryOp::add, s, number(m, 1))); }, 0.5) == 0);
  CHECK(slope([](Module& m, ValueId s) { return join(m, BinaryOp::pow, s, number(m, 3)); }, 0) == 0);
  CHECK(std::isinf(slope([](Module& m, ValueId s) { return take(m, UnaryOp::sqrt, s); }, 0)));
}

TEST_CASE("x^x by its closed form x^x (ln x + 1)", "[passes]") {
  const double x = 0.6;
  CHECK(slope([](Module& m, ValueId s) { return join(m, BinaryOp::pow, s, s); }, x) == Approx(std::pow(x, x) * (std::log(x) + 1)));
}
