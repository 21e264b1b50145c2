#include <catch2/catch.hpp>

#include "compiler/ir/text.h"
#include "compiler/ir/verify.h"
#include "compiler/passes/group.h"
#include "compiler/passes/pipeline.h"
#include "compiler/passes/structure.h"
#include "tests/unit/compiler/passes/rows.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;
using compiler::group;

namespace {

ValueId times(Module& m, ValueId x, ValueId y) { return append(m, Binary{BinaryOp::mul, x, y}); }

/// Functions B, B/2, -B, 3 and a generator on two bits with one Z on the first bit for each.
Module multiples(bool with_base) {
  Module module;
  const ValueId s = append(module, ReadArgument{Argument::s});
  const ValueId b = append(module, Unary{UnaryOp::exp, s});
  const ValueId half = append(module, Binary{BinaryOp::div, b, number(module, 2)});
  const ValueId minus = append(module, Unary{UnaryOp::neg, b});
  const ValueId three = number(module, 3);
  module.sets.push_back({"coefficients", {{"half", half}, {"minus", minus}, {"three", three}}, false, {}});
  if (with_base) module.sets[0].functions.push_back({"B", b});
  Generator one{"H", 2, {}, {}, false};
  one.sum.groups = {{0, {{1.0, {0, 2}}}}, {1, {{1.0, {0, 2}}, {0.5, {1, 0}}}}, {2, {{2.0, {0, 1}}}}};
  module.generators = {one};
  return module;
}

}  // namespace

TEST_CASE("constant multiples of one coefficient become one group", "[passes]") {
  const Module module = group(multiples(true));
  REQUIRE(verify(module).empty());
  const auto& groups = module.generators[0].sum.groups;
  REQUIRE(groups.size() == 2);
  CHECK(module.sets[0].functions[groups[0].coefficient].name == "B");
  REQUIRE(groups[0].terms.size() == 2);
  CHECK(groups[0].terms[0].word == runtime::PauliWord{0, 2});
  CHECK(groups[0].terms[0].factor == -0.5);
  CHECK(groups[0].terms[1].factor == -0.5);
  CHECK(module.sets[0].functions[groups[1].coefficient].name == "1");
  CHECK(groups[1].terms[0].factor == 6.0);
}

TEST_CASE("a common value without a row gets one at the end; the rows before stay", "[passes]") {
  const Module before = multiples(false), after = group(before);
  REQUIRE(after.sets[0].functions.size() == before.sets[0].functions.size() + 2);
  for (std::size_t row = 0; row < before.sets[0].functions.size(); ++row) CHECK(after.sets[0].functions[row] == before.sets[0].functions[row]);
}

TEST_CASE("words that cancel and coefficients that vanish leave nothing", "[passes]") {
  Module module;
  const ValueId s = append(module, ReadArgument{Argument::s});
  const ValueId nothing = times(module, number(module, 0), s);
  module.sets.push_back({"coefficients", {{"s", s}, {"-s", append(module, Unary{UnaryOp::neg, s})}, {"0", nothing}}, false, {}});
  Generator one{"H", 1, {}, {}, false};
  one.sum.groups = {{0, {{0.5, {1, 0}}}}, {1, {{0.5, {1, 0}}}}, {2, {{7.0, {0, 1}}}}};
  module.generators = {one};
  CHECK(group(module).generators[0].sum.groups.empty());
}

TEST_CASE("structure: a word with one Y is real if its factor is imaginary", "[passes]") {
  Module module = multiples(true);
  const auto with = [&](std::complex<double> factor, runtime::PauliWord word) {
    Module changed = module;
    changed.generators[0].sum.groups = {{0, {{factor, word}}}};
    return compiler::find_structure(changed).generators[0].structure;
  };
  CHECK(with(1, {1, 0}) == Structure{true, false, false});
  CHECK(with({0, 1}, {1, 0}) == Structure{false, true, false});
  CHECK(with(1, {1, 1}) == Structure{false, true, false});
  CHECK(with({0, 1}, {1, 1}) == Structure{true, false, false});
  CHECK(with({1, 1}, {3, 3}) == Structure{false, false, false});
  CHECK(with(1, {3, 3}) == Structure{true, false, false});
  CHECK(with(1, {0, 1}) == Structure{true, false, true});
}

TEST_CASE("the whole pipeline, text before and after", "[passes]") {
  Module module;
  module.name = "small";
  const ValueId s = append(module, ReadArgument{Argument::s});
  const ValueId left = append(module, Binary{BinaryOp::sub, number(module, 1), s});
  const ValueId squared = append(module, Binary{BinaryOp::pow, left, number(module, 2)});
  const ValueId halved = append(module, Binary{BinaryOp::div, times(module, number(module, 6), squared), number(module, 2)});
  module.sets.push_back({"coefficients", {{"drive", halved}}, true, {}});
  Generator one{"H", 1, {}, {}, false};
  one.sum.groups = {{0, {{-1.0, {1, 0}}}}};
  module.generators = {one};
  CHECK(to_text(compiler::optimize(module)) ==
        "tarn-ir 1\nmodule \"small\"\n"
        "%0 = argument s\n%1 = constant 1\n%2 = sub %1 %0\n%3 = mul %2 %2\n%4 = constant 6\n%5 = mul %3 %4\n"
        "%6 = constant 0.5\n%7 = mul %5 %6\n%8 = neg %2\n%9 = sub %8 %2\n%10 = mul %4 %9\n%11 = mul %6 %10\n"
        "set \"coefficients\" differentiate\nfunction \"drive\" %7 derivative %11\nfunction \"drive (common)\" %3 derivative %9\n"
        "generator \"H\" bits 1 real\ngroup 1\nterm -3 0 x 1 z 0\n");
}
