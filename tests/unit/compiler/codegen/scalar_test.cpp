#include <catch2/catch.hpp>
#include <cmath>
#include <cstring>
#include <functional>
#include <random>

#include "tests/unit/compiler/codegen/compiled.h"
#include "tests/unit/compiler/support/random_module.h"
#include "tests/unit/compiler/support/reference.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;

namespace {

/// Points with special places among them: knots, zeros, beyond the tables.
std::vector<Point> sample_points(std::size_t count, unsigned seed) {
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> spread(-1.5, 2.5);
  std::vector<Point> points;
  for (std::size_t k = 0; k < count; ++k) points.push_back({spread(random), spread(random), spread(random)});
  points[0] = {0, 1, -1};
  points[1] = {1, 0, 2};
  return points;
}

struct Evaluated {
  std::vector<double> values;
  tarn_status status;
};

Evaluated evaluate(tarn_values_fn function, std::uint32_t rows, const tarn_block* block, const std::vector<Point>& points) {
  std::vector<double> s, t, w;
  for (const Point& point : points) s.push_back(point.s), t.push_back(point.t), w.push_back(point.w);
  Evaluated result{std::vector<double>(rows * points.size(), -77), 0};
  result.status = function(block, points.size(), s.data(), t.data(), w.data(), result.values.data());
  return result;
}

/// Largest magnitude among the finite intermediate values: how much a rounding may be blown up.
double largest(const std::vector<double>& values) {
  double most = 0;
  for (const double value : values)
    if (std::isfinite(value)) most = std::max(most, std::abs(value));
  return most;
}

Module one_function(const std::function<ValueId(Module&, ValueId)>& make) {
  Module module;
  module.name = "one";
  const ValueId s = append(module, ReadArgument{Argument::s});
  const ValueId value = make(module, s);
  module.sets.push_back({"coefficients", {{"f", value}}, false, {}});
  return module;
}

std::int64_t ordered_bits(double x) {
  std::int64_t bits = 0;
  std::memcpy(&bits, &x, sizeof bits);
  return bits < 0 ? std::numeric_limits<std::int64_t>::min() - bits : bits;
}

double ulps(double a, double b) {
  if (a == b || (std::isnan(a) && std::isnan(b))) return 0;
  return std::abs(static_cast<double>(ordered_bits(a) - ordered_bits(b)));
}

}  // namespace

TEST_CASE("compiled functions equal the interpreter on random expressions", "[codegen]") {
  const std::uint32_t lanes = GENERATE(2u, 4u, 8u);
  const unsigned seed = GENERATE(range(1u, 9u));
  const Module module = random_functions(seed, 12);
  const runtime::Kernel kernel = compiled(module, lanes);
  runtime::InputBlock block(kernel, numbers_of(module));
  const std::vector<double> inputs{0.4, -1.2, 0.9};
  block.set_all(inputs);
  const auto points = sample_points(37, seed);
  const Evaluated result = evaluate(kernel.values(0), kernel.rows(0), block.block(), points);
  bool finite = true;
  std::size_t compared = 0;
  for (std::size_t p = 0; p < points.size(); ++p) {
    const auto expected = interpret(module, inputs, points[p]);
    const bool well_conditioned = largest(expected) < 1e3;
    for (std::size_t row = 0; row < kernel.rows(0); ++row) {
      const double wanted = expected[module.sets[0].functions[row].value.row];
      const double got = result.values[row * points.size() + p];
      finite = finite && std::isfinite(got);
      INFO("seed " << seed << ", function " << row << ", point " << p);
      if (std::isnan(wanted)) CHECK(std::isnan(got));
      if (std::isinf(wanted)) CHECK(got == wanted);
      if (!std::isfinite(wanted) || !well_conditioned) continue;
      CHECK(got == Approx(wanted).epsilon(1e-9).margin(1e-9));
      ++compared;
    }
  }
  CHECK(result.status == (finite ? TARN_OK : TARN_NOT_FINITE));
  CHECK(compared > 0);
}

TEST_CASE("a point's bits do not depend on how many points are asked for", "[codegen]") {
  const Module module = random_functions(5, 12);
  const runtime::Kernel kernel = compiled(module);
  runtime::InputBlock block(kernel, numbers_of(module));
  block.set_all(std::vector<double>{0.4, -1.2, 0.9});
  const auto points = sample_points(29, 3);
  const Evaluated all = evaluate(kernel.values(0), kernel.rows(0), block.block(), points);
  for (std::size_t count = 1; count < points.size(); ++count) {
    const std::vector<Point> few(points.begin(), points.begin() + static_cast<std::ptrdiff_t>(count));
    const Evaluated part = evaluate(kernel.values(0), kernel.rows(0), block.block(), few);
    for (std::size_t row = 0; row < kernel.rows(0); ++row)
      for (std::size_t p = 0; p < count; ++p)
        REQUIRE(ulps(part.values[row * count + p], all.values[row * points.size() + p]) == 0);
  }
  const Evaluated none = evaluate(kernel.values(0), kernel.rows(0), block.block(), {});
  CHECK(none.status == TARN_OK);
}

TEST_CASE("each lane reads its own inputs", "[codegen]") {
  Module module;
  module.inputs = {"x", "y"};
  const ValueId x = append(module, Input{0}), y = append(module, Input{1});
  module.sets.push_back({"coefficients", {{"f", append(module, Binary{BinaryOp::sub, x, y})}}, false, {}});
  const runtime::Kernel kernel = compiled(module);
  runtime::InputBlock block(kernel, {});
  for (std::uint32_t lane = 0; lane < kernel.lanes(); ++lane) block.set(0, lane, 10.0 * lane);
  block.set(1, 0.5);
  std::vector<double> out(3 * kernel.lanes());
  REQUIRE(kernel.values(0)(block.block(), out.size(), nullptr, nullptr, nullptr, out.data()) == TARN_OK);
  for (std::size_t p = 0; p < out.size(); ++p) CHECK(out[p] == 10.0 * static_cast<double>(p % kernel.lanes()) - 0.5);
}

TEST_CASE("vector functions are within 4 ulp of libm", "[codegen]") {
  struct Case {
    UnaryOp op;
    double low, high;
  };
  // The bound of glibc's manual for libmvec; libm itself is within 1 ulp on these ranges.
  const Case one = GENERATE(Case{UnaryOp::exp, -40, 40}, Case{UnaryOp::ln, 1e-6, 100}, Case{UnaryOp::log10, 1e-6, 100},
                            Case{UnaryOp::sin, -30, 30}, Case{UnaryOp::cos, -30, 30}, Case{UnaryOp::tan, -1.5, 1.5},
                            Case{UnaryOp::asin, -1, 1}, Case{UnaryOp::acos, -1, 1}, Case{UnaryOp::atan, -20, 20},
                            Case{UnaryOp::sinh, -10, 10}, Case{UnaryOp::cosh, -10, 10}, Case{UnaryOp::tanh, -5, 5},
                            Case{UnaryOp::sqrt, 0, 9});
  const std::uint32_t lanes = GENERATE(2u, 4u, 8u);
  const Module module = one_function([&](Module& m, ValueId s) { return append(m, Unary{one.op, s}); });
  const runtime::Kernel kernel = compiled(module, lanes);
  std::vector<Point> points;
  for (int k = 0; k <= 4000; ++k) points.push_back({one.low + (one.high - one.low) * k / 4000.0, 0, 0});
  runtime::InputBlock block(kernel, {});
  const Evaluated result = evaluate(kernel.values(0), 1, block.block(), points);
  double worst = 0;
  for (std::size_t p = 0; p < points.size(); ++p)
    worst = std::max(worst, ulps(result.values[p], interpret(module, {}, points[p])[1]));
  INFO("operation " << static_cast<int>(one.op) << " lanes " << lanes);
  CHECK(worst <= 4);
}

TEST_CASE("pow is within 4 ulp of libm", "[codegen]") {
  Module module;
  const ValueId s = append(module, ReadArgument{Argument::s}), t = append(module, ReadArgument{Argument::t});
  module.sets.push_back({"coefficients", {{"f", append(module, Binary{BinaryOp::pow, s, t})}}, false, {}});
  const runtime::Kernel kernel = compiled(module);
  std::vector<Point> points;
  for (int k = 0; k < 3000; ++k) points.push_back({0.01 + 0.003 * k, -3 + 0.002 * k, 0});
  runtime::InputBlock block(kernel, {});
  const Evaluated result = evaluate(kernel.values(0), 1, block.block(), points);
  for (std::size_t p = 0; p < points.size(); ++p) REQUIRE(ulps(result.values[p], std::pow(points[p].s, points[p].t)) <= 4);
}

TEST_CASE("values that are not finite are reported and still written", "[codegen]") {
  const Module module = one_function([](Module& m, ValueId s) {
    return append(m, Binary{BinaryOp::div, append(m, Constant{1}), s});
  });
  const runtime::Kernel kernel = compiled(module);
  runtime::InputBlock block(kernel, {});
  std::vector<Point> points(11, Point{2, 0, 0});
  CHECK(evaluate(kernel.values(0), 1, block.block(), points).status == TARN_OK);
  points[10].s = 0;
  const Evaluated result = evaluate(kernel.values(0), 1, block.block(), points);
  CHECK(result.status == TARN_NOT_FINITE);
  CHECK(result.values[9] == 0.5);
  CHECK(std::isinf(result.values[10]));
}

TEST_CASE("tables of every size find the piece a linear search finds", "[codegen]") {
  const std::size_t pieces = GENERATE(1u, 2u, 3u, 4u, 5u, 8u, 9u, 100u);
  std::mt19937 random(11);
  Module module;
  module.tables = {random_table(random, "table", pieces, -1, 1)};
  const ValueId s = append(module, ReadArgument{Argument::s});
  module.sets.push_back({"coefficients", {}, false, {}});
  for (std::uint8_t order = 0; order < 4; ++order)
    for (const Outside outside : {Outside::hold, Outside::zero})
      module.sets[0].functions.push_back({"f", append(module, TableRead{TableId{0}, s, order, outside})});
  const runtime::Kernel kernel = compiled(module);
  runtime::InputBlock block(kernel, numbers_of(module));
  std::vector<Point> points;
  for (const double knot : module.tables[0].knots)
    for (const double x : {std::nextafter(knot, -9), knot, std::nextafter(knot, 9), knot + 0.003}) points.push_back({x, 0, 0});
  points.push_back({-7, 0, 0});
  points.push_back({7, 0, 0});
  const Evaluated result = evaluate(kernel.values(0), kernel.rows(0), block.block(), points);
  for (std::size_t p = 0; p < points.size(); ++p) {
    const auto expected = interpret(module, {}, points[p]);
    for (std::size_t row = 0; row < 8; ++row)
      CHECK(result.values[row * points.size() + p] == Approx(expected[module.sets[0].functions[row].value.row]).epsilon(1e-12).margin(1e-13));
  }
}
