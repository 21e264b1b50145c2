#include "compiler/lower/generators.h"

#include <catch2/catch.hpp>
#include <random>

#include "tests/unit/compiler/lower/matrices.h"

using namespace tarn;
using runtime::OperatorSum;
using testing::Matrix;
using testing::matrix;

namespace {

constexpr std::uint32_t kRows = 4;

/// A module whose coefficient rows are four inputs.
ir::Module four_inputs() {
  ir::Module module;
  module.sets.push_back({"coefficients", {}, true, {}});
  return module;
}

OperatorSum random_sum(std::mt19937& random, std::uint32_t bits, bool hermitian) {
  std::uniform_real_distribution<double> number(-1, 1);
  std::uniform_int_distribution<std::uint64_t> letters(0, (1u << bits) - 1);
  OperatorSum sum;
  for (std::uint32_t row = 0; row < 2; ++row) {
    runtime::OperatorGroup group{row, {}};
    for (int k = 0; k < 3; ++k) {
      const std::complex<double> factor(number(random), hermitian ? 0 : number(random));
      group.terms.push_back({factor, {letters(random), letters(random)}});
    }
    sum.groups.push_back(group);
  }
  return sum;
}

Matrix random_density(std::mt19937& random, Eigen::Index size) {
  std::normal_distribution<double> normal;
  Matrix a(size, size);
  for (Eigen::Index i = 0; i < a.size(); ++i) a(i) = {normal(random), normal(random)};
  const Matrix rho = a * a.adjoint();
  return rho / rho.trace();
}

/// Values of all coefficient rows, products included, for the four inputs.
std::vector<double> coefficient_values(const ir::Module& module, const std::vector<double>& inputs) {
  std::vector<double> values;
  for (const ir::Value& value : module.values) {
    if (const auto* input = std::get_if<ir::Input>(&value.op)) values.push_back(inputs[input->slot]);
    if (const auto* binary = std::get_if<ir::Binary>(&value.op)) {
      values.push_back(values[binary->lhs.row] * values[binary->rhs.row]);
    }
  }
  std::vector<double> rows;
  for (const auto& function : module.sets[0].functions) rows.push_back(values[function.value.row]);
  return rows;
}

}  // namespace

TEST_CASE("generators equal the textbook formulas on random chips") {
  std::mt19937 random(11);
  for (std::uint32_t bits = 1; bits <= 3; ++bits) {
    ir::Module module = four_inputs();
    compiler::Rows rows(module, 0);
    for (std::uint32_t k = 0; k < kRows; ++k) {
      rows.row(ir::append(module, ir::Input{k}), "c");
    }
    runtime::Chip chip;
    chip.qubits.resize(bits);
    chip.hamiltonian = random_sum(random, bits, true);
    chip.drive = random_sum(random, bits, true);
    chip.jumps = {{random_sum(random, bits, false), "a"}, {random_sum(random, bits, false), "b"}};
    compiler::append_generators(chip, true, rows, module);
    REQUIRE(module.generators.size() == 3);

    const std::vector<double> c = coefficient_values(module, {0.7, -1.3, 0.4, 0.9});
    const Matrix h = matrix(chip.hamiltonian, bits, c) + matrix(chip.drive, bits, c);
    const std::complex<double> i(0, 1);
    CHECK((matrix(module.generators[0].sum, bits, c) - h).norm() < 1e-13);
    CHECK((matrix(module.generators[1].sum, bits, c) + i * h).norm() < 1e-13);

    const Eigen::Index size = Eigen::Index{1} << bits;
    const Matrix rho = random_density(random, size);
    Matrix expected = -i * (h * rho - rho * h);
    for (const auto& jump : chip.jumps) {
      const Matrix l = matrix(jump.op, bits, c);
      const Matrix square = l.adjoint() * l;
      expected += l * rho * l.adjoint() - 0.5 * (square * rho + rho * square);
    }
    const Matrix row_major = rho.transpose();
    const Eigen::VectorXcd flat = Eigen::Map<const Eigen::VectorXcd>(row_major.data(), size * size);
    const Eigen::VectorXcd moved = matrix(module.generators[2].sum, 2 * bits, c) * flat;
    const Matrix found = Eigen::Map<const Matrix>(moved.data(), size, size).transpose();
    CHECK((found - expected).norm() < 1e-12);
    CHECK(std::abs(found.trace()) < 1e-13);
  }
}
