#include <Eigen/Core>
#include <bit>
#include <catch2/catch.hpp>
#include <complex>
#include <random>

#include "compiler/passes/pipeline.h"
#include "tests/unit/compiler/codegen/compiled.h"
#include "tests/unit/compiler/support/random_module.h"
#include "tests/unit/compiler/support/reference.h"

using namespace tarn;
using namespace tarn::ir;
using namespace tarn::test;
using Complex = std::complex<double>;

namespace {

/// The matrix of a word as a Kronecker product of 2x2 Pauli matrices, most significant bit first.
Eigen::MatrixXcd matrix_of(const runtime::PauliWord& word, std::uint32_t bits) {
  Eigen::MatrixXcd product = Eigen::MatrixXcd::Identity(1, 1);
  for (std::uint32_t bit = bits; bit-- > 0;) {
    const bool x = (word.x >> bit & 1) != 0, z = (word.z >> bit & 1) != 0;
    Eigen::Matrix2cd one;
    if (x && z) one << 0, Complex(0, -1), Complex(0, 1), 0;
    if (x && !z) one << 0, 1, 1, 0;
    if (!x && z) one << 1, 0, 0, -1;
    if (!x && !z) one << 1, 0, 0, 1;
    Eigen::MatrixXcd next(2 * product.rows(), 2 * product.cols());
    for (Eigen::Index i = 0; i < product.rows(); ++i)
      for (Eigen::Index j = 0; j < product.cols(); ++j) next.block<2, 2>(2 * i, 2 * j) = product(i, j) * one;
    product = next;
  }
  return product;
}

Eigen::MatrixXcd matrix_of(const Generator& generator, const std::vector<double>& coefficients) {
  const Eigen::Index size = Eigen::Index{1} << generator.bits;
  Eigen::MatrixXcd sum = Eigen::MatrixXcd::Zero(size, size);
  for (const auto& group : generator.sum.groups)
    for (const auto& term : group.terms) sum += coefficients[group.coefficient] * term.factor * matrix_of(term.word, generator.bits);
  return sum;
}

Doubles random_amplitudes(std::uint32_t bits, unsigned seed) {
  std::mt19937 random(seed);
  std::normal_distribution<double> normal;
  Doubles vector(std::size_t{2} << bits);
  for (double& part : vector) part = normal(random);
  return vector;
}

Eigen::VectorXcd as_eigen(const Doubles& vector) {
  Eigen::VectorXcd result(static_cast<Eigen::Index>(vector.size() / 2));
  for (Eigen::Index k = 0; k < result.size(); ++k) result(k) = {vector[static_cast<std::size_t>(2 * k)], vector[static_cast<std::size_t>(2 * k + 1)]};
  return result;
}

std::vector<double> coefficients_at(const runtime::Kernel& kernel, double s) {
  runtime::InputBlock block(kernel, {});
  std::vector<double> out(kernel.rows(0));
  REQUIRE(kernel.values(0)(block.block(), 1, &s, &s, &s, out.data()) == TARN_OK);
  return out;
}

Doubles prepared(const runtime::Kernel& kernel, std::uint32_t generator) {
  Doubles data(kernel.prepared_doubles(generator) + 1);
  REQUIRE(kernel.prepare(generator)(data.data()) == TARN_OK);
  return data;
}

void check_apply(const Module& module, std::uint32_t lanes) {
  const runtime::Kernel kernel = compiled(module, lanes);
  const auto coefficients = coefficients_at(kernel, 0.3);
  for (std::uint32_t k = 0; k < module.generators.size(); ++k) {
    const std::uint32_t bits = module.generators[k].bits;
    const Doubles x = random_amplitudes(bits, 17 + k), data = prepared(kernel, k);
    Doubles y(x.size(), NAN);
    REQUIRE(kernel.apply(k)(coefficients.data(), data.data(), x.data(), y.data()) == TARN_OK);
    const Eigen::MatrixXcd matrix = matrix_of(module.generators[k], coefficients);
    const double scale = matrix.cwiseAbs().rowwise().sum().maxCoeff() * as_eigen(x).cwiseAbs().maxCoeff();
    INFO("bits " << bits << " lanes " << lanes);
    CHECK((as_eigen(y) - matrix * as_eigen(x)).cwiseAbs().maxCoeff() <= 1e-13 * (scale + 1));
  }
}

}  // namespace

TEST_CASE("apply equals the matrix of random Pauli sums", "[codegen]") {
  const std::uint32_t bits = GENERATE(range(1u, 9u));
  const std::uint32_t lanes = GENERATE(2u, 4u, 8u);
  Module module = simple_coefficients(5);
  for (unsigned seed = 0; seed < 3; ++seed) {
    add_random_generator(module, 100 * bits + seed, bits, 1 + 7 * seed, false);
    add_random_generator(module, 100 * bits + 50 + seed, bits, 2 + 9 * seed, true);
  }
  check_apply(module, lanes);
  check_apply(compiler::optimize(module), lanes);
}

TEST_CASE("apply handles every word of three bits at once", "[codegen]") {
  Module module = simple_coefficients(2);
  Generator dense{"dense", 3, {}, {}, false};
  dense.sum.groups.resize(2);
  dense.sum.groups[1].coefficient = 1;
  for (std::uint64_t x = 0; x < 8; ++x)
    for (std::uint64_t z = 0; z < 8; ++z)
      dense.sum.groups[(x ^ z) & 1].terms.push_back({{0.1 + 0.2 * static_cast<double>(x), 0.3 - 0.05 * static_cast<double>(z)}, {x, z}});
  module.generators.push_back(dense);
  check_apply(module, 0);
}

TEST_CASE("structured generators: annealing chains, -i times them, diagonal ones, nothing at all", "[codegen]") {
  const std::uint32_t bits = GENERATE(1u, 2u, 4u, 6u, 8u);
  Module module = simple_coefficients(3);
  Generator chain{"chain", bits, {}, {}, false};
  chain.sum.groups = {{0, {}}, {1, {}}};
  for (std::uint32_t q = 0; q < bits; ++q) {
    chain.sum.groups[0].terms.push_back({-0.5, {std::uint64_t{1} << q, 0}});
    chain.sum.groups[1].terms.push_back({0.1 * (q + 1), {0, std::uint64_t{1} << q}});
    if (q > 0) chain.sum.groups[1].terms.push_back({-0.7, {0, std::uint64_t{3} << (q - 1)}});
  }
  Generator turned = chain, diagonal = chain, empty = chain;
  for (auto& group : turned.sum.groups)
    for (auto& term : group.terms) term.factor *= Complex(0, -1);
  diagonal.sum.groups.erase(diagonal.sum.groups.begin());
  empty.sum.groups.clear();
  module.generators = {chain, turned, diagonal, empty};
  check_apply(module, 0);
  const Module optimized = compiler::optimize(module);
  CHECK(optimized.generators[0].structure.real_words);
  CHECK(optimized.generators[1].structure.imaginary);
  CHECK(optimized.generators[2].structure.diagonal);
  check_apply(optimized, 0);
}

TEST_CASE("stage combines any number of vectors and applies the generator", "[codegen]") {
  const std::uint32_t bits = GENERATE(1u, 3u, 7u);
  Module module = simple_coefficients(3);
  add_random_generator(module, 5, bits, 9, false);
  const runtime::Kernel kernel = compiled(module);
  const auto coefficients = coefficients_at(kernel, -0.2);
  const Doubles data = prepared(kernel, 0);
  std::vector<Doubles> vectors;
  std::vector<const double*> pointers;
  std::vector<double> weights;
  for (unsigned m = 1; m <= 15; ++m) {
    vectors.push_back(random_amplitudes(bits, m));
    pointers.clear();
    for (const Doubles& vector : vectors) pointers.push_back(vector.data());
    weights.push_back(0.3 * m - 1);
    Doubles argument(vectors[0].size()), y(argument.size()), expected(argument.size());
    REQUIRE(kernel.stage(0)(coefficients.data(), data.data(), m, weights.data(), pointers.data(), argument.data(), y.data()) == TARN_OK);
    for (std::size_t i = 0; i < argument.size(); ++i) {
      double sum = 0;
      for (unsigned j = 0; j < m; ++j) sum += weights[j] * vectors[j][i];
      CHECK(argument[i] == Approx(sum).margin(1e-13));
    }
    kernel.apply(0)(coefficients.data(), data.data(), argument.data(), expected.data());
    CHECK(y == expected);
  }
  CHECK(kernel.stage(0)(coefficients.data(), data.data(), 0, nullptr, nullptr, nullptr, nullptr) == TARN_BAD_ARGUMENT);
}

TEST_CASE("a diagonal with a coefficient for each word is summed anew", "[codegen]") {
  const std::uint32_t bits = GENERATE(6u, 7u, 8u);
  const std::uint32_t lanes = GENERATE(2u, 8u);
  Module module = simple_coefficients(3 * bits);
  Generator spread{"spread", bits, {}, {}, false};
  for (std::uint32_t q = 0; q < bits; ++q) {
    const std::uint64_t here = std::uint64_t{1} << q, next = std::uint64_t{1} << (q + 1) % bits;
    spread.sum.groups.push_back({3 * q, {{0.3 + 0.1 * q, {0, here}}}});
    spread.sum.groups.push_back({3 * q + 1, {{-0.8, {0, here ^ next}}}});
    spread.sum.groups.push_back({3 * q + 2, {{-0.5, {here, 0}}}});
  }
  Generator turned = spread, both = spread;
  for (auto& group : turned.sum.groups)
    for (auto& term : group.terms) term.factor *= Complex(0, -1);
  for (auto& group : both.sum.groups)
    for (auto& term : group.terms) term.factor *= Complex(0.6, -1.1);
  module.generators = {spread, turned, both};
  check_apply(module, lanes);
}
