#include <catch2/catch.hpp>

#include "compiler/ir/verify.h"
#include "lang/support/check.h"
#include "tests/unit/compiler/support/random_module.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;

namespace {

/// The one sentence about a module that was broken on purpose.
std::string only_fault(const Module& module) {
  const auto broken = verify(module);
  REQUIRE(broken.size() == 1);
  return broken[0];
}

Module sound() {
  Module module = random_functions(3, 4);
  add_random_generator(module, 3, 3, 5, false);
  return module;
}

}  // namespace

TEST_CASE("sound modules pass", "[ir]") {
  CHECK(verify(Module{}).empty());
  CHECK(verify(sound()).empty());
}

TEST_CASE("each broken rule is a sentence", "[ir]") {
  Module module = sound();
  SECTION("a use before its definition") {
    module.values.push_back({Unary{UnaryOp::neg, ValueId{static_cast<std::uint32_t>(module.values.size())}}, Type::real});
    CHECK(only_fault(module).find("does not precede it") != std::string::npos);
  }
  SECTION("a truth where a number is due") {
    const ValueId truth = append(module, Constant{1}, Type::truth);
    append(module, Unary{UnaryOp::exp, truth});
    CHECK(only_fault(module).find("wrong type") != std::string::npos);
  }
  SECTION("an input that does not exist") {
    append(module, Input{9});
    CHECK(only_fault(module).find("input that does not exist") != std::string::npos);
  }
  SECTION("a table that does not exist, an order that is too high") {
    append(module, TableRead{TableId{7}, ValueId{0}});
    append(module, TableRead{TableId{0}, ValueId{0}, 4});
    CHECK(verify(module).size() == 2);
  }
  SECTION("knots that stand still") {
    module.tables[0].knots[1] = module.tables[0].knots[0];
    CHECK(only_fault(module).find("do not increase") != std::string::npos);
  }
  SECTION("derivatives of some functions only") {
    module.sets[0].derivatives = {ValueId{0}};
    CHECK(only_fault(module).find("derivatives of some functions only") != std::string::npos);
  }
  SECTION("a word beyond the bits") {
    module.generators[0].sum.groups[0].terms[0].word.x = 8;
    CHECK(only_fault(module).find("beyond its bits") != std::string::npos);
  }
  SECTION("two groups of one coefficient") {
    module.generators[0].sum.groups.push_back(module.generators[0].sum.groups[0]);
    CHECK(only_fault(module).find("two groups of one coefficient") != std::string::npos);
  }
}

TEST_CASE("append refuses operands that do not exist yet", "[ir]") {
  Module module;
  CHECK_THROWS_AS(append(module, Unary{UnaryOp::neg, ValueId{0}}), InternalError);
}
