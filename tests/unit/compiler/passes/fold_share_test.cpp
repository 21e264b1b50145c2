#include <catch2/catch.hpp>
#include <cmath>
#include <functional>

#include "compiler/ir/text.h"
#include "compiler/ir/verify.h"
#include "compiler/passes/fold.h"
#include "compiler/passes/pipeline.h"
#include "compiler/passes/share.h"
#include "tests/unit/compiler/passes/rows.h"
#include "tests/unit/compiler/support/random_module.h"
#include "tests/unit/compiler/support/reference.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;

namespace {

/// The passes keep a module's functions: same values at a few points, NaN for NaN, bit for bit.
void check_same_values(const Module& before, const Module& after, double tolerance) {
  const std::vector<double> inputs{0.7, -0.3, 1.9};
  for (const Point point : {Point{0, 0, 0}, {1, 1, 1}, {0.37, 12.5, -0.8}, {-0.2, 0.1, 3.3}}) {
    const auto a = interpret(before, inputs, point), b = interpret(after, inputs, point);
    for (std::size_t row = 0; row < before.sets[0].functions.size(); ++row) {
      const double x = a[before.sets[0].functions[row].value.row], y = b[after.sets[0].functions[row].value.row];
      INFO("function " << row << ": " << x << " became " << y);
      CHECK(((std::isnan(x) && std::isnan(y)) || x == y || std::abs(x - y) <= tolerance * std::abs(x)));
    }
  }
}

/// One function of s, folded and shared, as text without its frame.
std::string simplified(const std::function<ValueId(Module&, ValueId)>& make) {
  Module module;
  const ValueId s = append(module, ReadArgument{Argument::s});
  const ValueId value = make(module, s);
  module.sets.push_back({"c", {{"f", value}}, false, {}});
  const std::string text = to_text(compiler::share(compiler::fold(module)));
  const std::size_t first = text.find('%'), last = text.find("set ");
  return text.substr(first, last - first);
}


}  // namespace

TEST_CASE("folding and sharing keep values of random expressions", "[passes]") {
  const unsigned seed = GENERATE(range(0u, 60u));
  const Module module = random_functions(seed, 8);
  const Module folded = compiler::fold(module);
  CHECK(verify(folded).empty());
  check_same_values(module, folded, 1e-15);  // pow(x, 2) becomes x x, up to one rounding of pow
  const Module shared = compiler::share(folded);
  CHECK(verify(shared).empty());
  check_same_values(folded, shared, 0);
  CHECK(shared.values.size() <= folded.values.size());
  CHECK(to_text(compiler::share(shared)) == to_text(shared));
}

TEST_CASE("identities of arithmetic", "[passes]") {
  const std::string only_s = "%0 = argument s\n";
  CHECK(simplified([](Module& m, ValueId s) { return join(m, BinaryOp::add, s, number(m, 0)); }) == only_s);
  CHECK(simplified([](Module& m, ValueId s) { return join(m, BinaryOp::mul, number(m, 1), s); }) == only_s);
  CHECK(simplified([](Module& m, ValueId s) { return join(m, BinaryOp::pow, s, number(m, 1)); }) == only_s);
  CHECK(simplified([](Module& m, ValueId s) { return join(m, BinaryOp::pow, s, number(m, 2)); }) == only_s + "%1 = mul %0 %0\n");
  CHECK(simplified([](Module& m, ValueId s) {
          return append(m, Unary{UnaryOp::neg, append(m, Unary{UnaryOp::neg, s})});
        }) == only_s);
  CHECK(simplified([](Module& m, ValueId) {
          return join(m, BinaryOp::mul, number(m, 2), join(m, BinaryOp::add, number(m, 3), number(m, 4)));
        }) == "%0 = constant 14\n");
  CHECK(simplified([](Module& m, ValueId s) {
          const ValueId yes = append(m, Binary{BinaryOp::less, number(m, 1), number(m, 2)}, Type::truth);
          return append(m, Select{yes, s, number(m, 5)});
        }) == only_s);
}

TEST_CASE("what could hide infinity is left alone", "[passes]") {
  CHECK(simplified([](Module& m, ValueId s) { return join(m, BinaryOp::mul, s, number(m, 0)); }).find("mul") != std::string::npos);
  CHECK(simplified([](Module& m, ValueId) { return join(m, BinaryOp::div, number(m, 1), number(m, 0)); }).find("div") != std::string::npos);
}

TEST_CASE("equal values are computed once, in either order of operands, and unread ones dropped", "[passes]") {
  CHECK(simplified([](Module& m, ValueId s) {
          const ValueId first = append(m, Unary{UnaryOp::exp, s}), second = append(m, Unary{UnaryOp::sin, s});
          const ValueId third = append(m, Unary{UnaryOp::exp, s}), fourth = append(m, Unary{UnaryOp::sin, s});
          const ValueId a = join(m, BinaryOp::add, first, second), b = join(m, BinaryOp::add, fourth, third);
          append(m, Unary{UnaryOp::cosh, b});
          return join(m, BinaryOp::mul, a, b);
        }) == "%0 = argument s\n%1 = exp %0\n%2 = sin %0\n%3 = add %1 %2\n%4 = mul %3 %3\n");
}
