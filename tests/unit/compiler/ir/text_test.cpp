#include <catch2/catch.hpp>
#include <cstdlib>
#include <fstream>
#include <limits>
#include <sstream>

#include "compiler/ir/text.h"
#include "tests/unit/compiler/support/random_module.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;

namespace {

Module module_of(const std::string& text) {
  auto module = from_text(text);
  if (!module) FAIL("line " << module.error().line << ": " << module.error().message);
  return *module;
}

bool same_terms(const Generator& a, const Generator& b) {
  if (a.sum.groups.size() != b.sum.groups.size()) return false;
  for (std::size_t g = 0; g < a.sum.groups.size(); ++g) {
    const auto &x = a.sum.groups[g], &y = b.sum.groups[g];
    if (x.coefficient != y.coefficient || x.terms.size() != y.terms.size()) return false;
    for (std::size_t k = 0; k < x.terms.size(); ++k)
      if (x.terms[k].factor != y.terms[k].factor || x.terms[k].word != y.terms[k].word) return false;
  }
  return a.name == b.name && a.bits == b.bits && a.structure == b.structure && a.lanes == b.lanes;
}

void check_same(const Module& a, const Module& b) {
  CHECK(a.name == b.name);
  CHECK(a.inputs == b.inputs);
  CHECK(a.tables == b.tables);
  CHECK(a.values == b.values);
  CHECK(a.sets == b.sets);
  REQUIRE(a.generators.size() == b.generators.size());
  for (std::size_t k = 0; k < a.generators.size(); ++k) CHECK(same_terms(a.generators[k], b.generators[k]));
}

/// A small chip as lowering would write it: two qubits, a schedule from a table, one parameter.
Module small_chip() {
  Module module;
  module.name = "pair";
  module.inputs = {"bias"};
  module.tables = {{"curves.csv B", {0, 0.5, 1}, {{0, 2}, {4, 3}, {0, -0.5}, {0, 0.25}}}};
  const ValueId s = append(module, ReadArgument{Argument::s});
  const ValueId one = append(module, Constant{1});
  const ValueId left = append(module, Binary{BinaryOp::sub, one, s});
  const ValueId problem = append(module, TableRead{TableId{0}, s, 0, Outside::hold});
  const ValueId bias = append(module, Input{0});
  const ValueId biased = append(module, Binary{BinaryOp::mul, bias, problem});
  module.sets.push_back({"coefficients", {{"drive", left}, {"problem", problem}, {"bias", biased}}, true, {one, one, one}});
  module.sets.push_back({"observables", {{"late", append(module, Binary{BinaryOp::less, one, s}, Type::truth)}}, false, {}});
  Generator hamiltonian{"H", 2, {}, {true, false, false}, true};
  hamiltonian.sum.groups = {{0, {{-0.5, {1, 0}}, {-0.5, {2, 0}}}}, {1, {{0.25, {0, 3}}}}, {2, {{0.1, {0, 1}}, {{0, 0.5}, {3, 1}}}}};
  module.generators = {hamiltonian};
  return module;
}

}  // namespace

TEST_CASE("text and back is the identity on random modules, both ways", "[ir]") {
  const unsigned seed = GENERATE(range(0u, 40u));
  Module module = random_functions(seed, 6);
  add_random_generator(module, seed, 1 + seed % 9, 12, false);
  module.sets[0].differentiate = seed % 2 == 0;
  const std::string text = to_text(module);
  const Module again = module_of(text);
  check_same(module, again);
  CHECK(to_text(again) == text);
  CHECK(to_text(module_of(print(module))) == text);
}

TEST_CASE("doubles of every kind survive to the last bit", "[ir]") {
  Module module;
  const double largest = std::numeric_limits<double>::max();
  for (const double number : {0.1, 1.0 / 3, -0.0, 5e-324, largest, -largest, 2.2250738585072014e-308, std::numeric_limits<double>::infinity()})
    append(module, Constant{number});
  const Module again = module_of(to_text(module));
  REQUIRE(again.values.size() == module.values.size());
  for (std::size_t k = 0; k < module.values.size(); ++k) {
    const double a = std::get<Constant>(module.values[k].op).value, b = std::get<Constant>(again.values[k].op).value;
    CHECK(a == b);
    CHECK(std::signbit(a) == std::signbit(b));
  }
}

TEST_CASE("names of any bytes survive", "[ir]") {
  Module module;
  module.name = "quote \" backslash \\ newline \n tab \t hash # percent % \x01";
  module.inputs = {"", " ", "Größe [µs]", "\\x41"};
  const Module again = module_of(to_text(module));
  CHECK(again.name == module.name);
  CHECK(again.inputs == module.inputs);
}

TEST_CASE("numbers of tables do not enter the shape of a module", "[ir]") {
  Module a = small_chip(), b = small_chip();
  b.tables[0].c[1] = {5, -5};
  b.tables[0].knots = {0, 0.25, 1};
  CHECK(to_text(a) != to_text(b));
  CHECK(to_text(shape_only(a)) == to_text(shape_only(b)));
  check_same(module_of(to_text(shape_only(a))), shape_only(a));
  b.tables[0].knots.push_back(2);
  for (auto& column : b.tables[0].c) column.push_back(0);
  CHECK(to_text(shape_only(a)) != to_text(shape_only(b)));
}

TEST_CASE("texts that are no module are refused with their line", "[ir]") {
  const auto wrong = [](const std::string& text) {
    const auto module = from_text(text);
    REQUIRE(!module);
    return module.error();
  };
  CHECK(wrong("").line == 1);
  CHECK(wrong("tarn-ir 1\nmodule \"m\"\nnonsense\n").line == 3);
  CHECK(wrong("tarn-ir 1\nmodule \"m\"\n%0 = constant 1..5\n").line == 3);
  CHECK(wrong("tarn-ir 1\nmodule \"m\"\n%1 = constant 1\n").line == 3);
  CHECK(wrong("tarn-ir 1\nmodule \"m\"\n%0 = frobnicate %0\n").message.find("frobnicate") != std::string::npos);
  CHECK(wrong("tarn-ir 1\nmodule \"m\"\ntable \"t\" pieces 99999999999\n").message.find("too many pieces") != std::string::npos);
  CHECK_FALSE(from_text("tarn-ir 2\nmodule \"m\"\n").has_value());
  CHECK_FALSE(from_text("tarn-ir 1\nmodule \"m").has_value());
}

TEST_CASE("every prefix of a text is read or refused, never more", "[ir]") {
  const std::string text = to_text(small_chip());
  for (std::size_t length = 0; length < text.size(); ++length) CHECK_NOTHROW(from_text(text.substr(0, length)));
}

TEST_CASE("the printed form of a small chip", "[ir]") {
  const std::string path = TARN_GOLDEN_DIR "/pair.ir.expected";
  const std::string printed = print(small_chip());
  if (std::getenv("TARN_UPDATE_GOLDEN")) std::ofstream(path) << printed;
  std::ifstream file(path);
  std::stringstream expected;
  expected << file.rdbuf();
  CHECK(printed == expected.str());
}
