#include <catch2/catch.hpp>
#include <random>

#include "compiler/passes/pipeline.h"
#include "tests/unit/compiler/codegen/compiled.h"
#include "tests/unit/compiler/support/random_module.h"
#include "tests/unit/compiler/support/reference.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;

namespace {

Doubles random_doubles(std::size_t count, unsigned seed) {
  std::mt19937 random(seed);
  std::normal_distribution<double> normal;
  Doubles numbers(count);
  for (double& number : numbers) number = normal(random);
  return numbers;
}

/// Lane l of a lane vector as a plain one.
Doubles take_lane(const Doubles& lanes, std::uint32_t width, std::uint32_t lane) {
  Doubles plain(lanes.size() / width);
  for (std::size_t i = 0; i < plain.size(); ++i) plain[i] = lanes[i * width + lane];
  return plain;
}

/// The entries of a Liouvillian: the commutator with a chain, dephasing and decay in every bit.
Generator liouvillian(std::uint32_t qubits) {
  Generator made{"liouvillian", 2 * qubits, {}, {}, true};
  made.sum.groups = {{0, {}}, {1, {}}, {2, {}}};
  const std::complex<double> i(0, 1);
  for (std::uint32_t q = 0; q < qubits; ++q) {
    const std::uint64_t row = std::uint64_t{1} << (qubits + q), column = std::uint64_t{1} << q;
    made.sum.groups[0].terms.push_back({-i, {row, 0}});
    made.sum.groups[0].terms.push_back({i, {column, 0}});
    made.sum.groups[1].terms.push_back({-0.3 * i, {0, row}});
    made.sum.groups[1].terms.push_back({0.3 * i, {0, column}});
    // |0><1| rho |1><0| = (X + iY) rho (X - iY) / 4; Y acts on columns as its transpose, -Y
    for (const auto& [factor, x, z] : {std::tuple<std::complex<double>, std::uint64_t, std::uint64_t>{0.25, row | column, 0},
                                       {0.25 * i, row | column, row}, {0.25 * i, row | column, column}, {-0.25, row | column, row | column}})
      made.sum.groups[2].terms.push_back({factor, {x, z}});
    made.sum.groups[2].terms.push_back({-0.5, {0, 0}});
    made.sum.groups[2].terms.push_back({0.25, {0, row}});
    made.sum.groups[2].terms.push_back({0.25, {0, column}});
  }
  return made;
}

void check_lanes(const Module& module, std::uint32_t asked) {
  const runtime::Kernel kernel = compiled(module, asked);
  const std::uint32_t width = kernel.lanes(), rows = kernel.rows(0);
  const Doubles coefficients = random_doubles(std::size_t{rows} * width, 9);
  for (std::uint32_t k = 0; k < module.generators.size(); ++k) {
    REQUIRE(kernel.lane_apply(k) != nullptr);
    const std::uint32_t bits = kernel.bits(k);
    Doubles prepared(kernel.prepared_doubles(k) + 1), y((std::size_t{2} << bits) * width, -1), argument = y, z = y;
    kernel.prepare(k)(prepared.data());
    const Doubles x = random_doubles(y.size(), k), x2 = random_doubles(y.size(), k + 50), weights = random_doubles(2 * width, 4);
    REQUIRE(kernel.lane_apply(k)(coefficients.data(), nullptr, x.data(), y.data()) == TARN_OK);
    const double* vectors[] = {x.data(), x2.data()};
    REQUIRE(kernel.lane_stage(k)(coefficients.data(), nullptr, 2, weights.data(), vectors, argument.data(), z.data()) == TARN_OK);
    for (std::uint32_t lane = 0; lane < width; ++lane) {
      const Doubles own = take_lane(coefficients, width, lane), plain = take_lane(x, width, lane), mixed = take_lane(argument, width, lane);
      Doubles expected(plain.size());
      kernel.apply(k)(own.data(), prepared.data(), plain.data(), expected.data());
      const Doubles got = take_lane(y, width, lane);
      for (std::size_t i = 0; i < plain.size(); ++i) {
        CHECK(got[i] == Approx(expected[i]).epsilon(1e-12).margin(1e-12));
        CHECK(mixed[i] == Approx(weights[lane] * plain[i] + weights[width + lane] * take_lane(x2, width, lane)[i]).margin(1e-13));
      }
      kernel.apply(k)(own.data(), prepared.data(), mixed.data(), expected.data());
      for (std::size_t i = 0; i < plain.size(); ++i)
        CHECK(take_lane(z, width, lane)[i] == Approx(expected[i]).epsilon(1e-12).margin(1e-12));
    }
  }
}

}  // namespace

TEST_CASE("lanes equal the plain generator, each with its own coefficients", "[codegen]") {
  const std::uint32_t lanes = GENERATE(2u, 4u, 8u);
  Module module = simple_coefficients(4);
  for (std::uint32_t bits = 1; bits <= 4; ++bits) {
    add_random_generator(module, bits, bits, 3 * bits, false);
    module.generators.back().lanes = true;
  }
  check_lanes(module, lanes);
}

TEST_CASE("Liouvillians of one to three qubits in lanes, straight and by table", "[codegen]") {
  Module module = simple_coefficients(3);
  for (std::uint32_t qubits = 1; qubits <= 3; ++qubits) module.generators.push_back(liouvillian(qubits));
  add_random_generator(module, 8, 6, 300, false);  // dense: goes by table
  module.generators.back().lanes = true;
  check_lanes(compiler::optimize(module), 0);
}

TEST_CASE("a Liouvillian keeps the trace: its rows of populations sum to zero", "[codegen]") {
  Module module = simple_coefficients(3);
  module.generators.push_back(liouvillian(2));
  const runtime::Kernel kernel = compiled(compiler::optimize(module));
  const std::vector<double> coefficients{0.7, -0.4, 1.3};
  Doubles prepared(kernel.prepared_doubles(0) + 1), y(32);
  kernel.prepare(0)(prepared.data());
  const Doubles x = random_doubles(32, 3);
  kernel.apply(0)(coefficients.data(), prepared.data(), x.data(), y.data());
  double trace = 0;
  for (std::size_t k = 0; k < 4; ++k) trace += y[2 * (5 * k)];
  CHECK(std::abs(trace) < 1e-13);
}
