// The compiled Hamiltonian of random chips equals a matrix made of Kronecker products from the same
// random numbers: kinds, couplers, nested chips, loops, offsets, words, in every bit order that matters.
#include <catch2/catch.hpp>
#include <filesystem>

#include "compiler/lower/lower.h"
#include "compiler/passes/pipeline.h"
#include "tests/unit/compiler/codegen/compiled.h"
#include "tests/unit/compiler/support/reference.h"
#include "tests/unit/compiler/whole/random_chip.h"
#include "tests/unit/compiler/whole/text_model.h"

using namespace tarn;
using namespace tarn::test;
using Eigen::MatrixXcd;
using Eigen::VectorXcd;

namespace {

constexpr std::complex<double> kI{0, 1};

/// A part in 1e12 of what H makes of a vector like psi.
double allowed(const MatrixXcd& h, const VectorXcd& psi) {
  return 1e-12 * h.norm() * psi.norm() / std::sqrt(static_cast<double>(h.rows()));
}

struct Compiled {
  std::vector<runtime::TableNumbers> tables;
  runtime::Kernel kernel;
  runtime::InputBlock block;
};

Compiled compile_chip(const TextModel& model, double g, double f) {
  const ir::Module module = compiler::optimize(compiler::lower(model.instance, model.sources()).module);
  const runtime::Kernel kernel = compiled(module);
  Compiled result{numbers_of(module), kernel, runtime::InputBlock(kernel, numbers_of(module))};
  for (std::size_t k = 0; k < model.instance.parameters.size(); ++k) {
    result.block.set(static_cast<std::uint32_t>(k), model.instance.parameters[k].name == "g" ? g : f);
  }
  result.block.set(static_cast<std::uint32_t>(model.instance.parameters.size()), 1);  // offsets are on
  return result;
}

VectorXcd apply(const Compiled& model, std::uint32_t generator, const VectorXcd& psi, double s, double t) {
  std::vector<double> coefficients(model.kernel.rows(0));
  REQUIRE(model.kernel.values(0)(model.block.block(), 1, &s, &t, &s, coefficients.data()) == TARN_OK);
  const auto size = static_cast<std::size_t>(psi.size());
  Doubles prepared(model.kernel.prepared_doubles(generator) + 1), x(2 * size), y(2 * size);
  for (std::size_t i = 0; i < size; ++i) x[2 * i] = psi[static_cast<Eigen::Index>(i)].real(), x[2 * i + 1] = psi[static_cast<Eigen::Index>(i)].imag();
  REQUIRE(model.kernel.prepare(generator)(prepared.data()) == TARN_OK);
  REQUIRE(model.kernel.apply(generator)(coefficients.data(), prepared.data(), x.data(), y.data()) == TARN_OK);
  VectorXcd result(psi.size());
  for (std::size_t i = 0; i < size; ++i) result[static_cast<Eigen::Index>(i)] = {y[2 * i], y[2 * i + 1]};
  return result;
}

/// -i H on the same vector in every lane, each lane at an s of its own; the results, one a column.
MatrixXcd lane_apply(const Compiled& model, const VectorXcd& psi, const std::vector<double>& s, double t) {
  const std::size_t lanes = model.kernel.lanes(), size = static_cast<std::size_t>(psi.size());
  const std::vector<double> times(lanes, t);
  Doubles coefficients(model.kernel.rows(0) * lanes), prepared(model.kernel.prepared_doubles(runtime::kSchroedinger) + 1);
  Doubles x(2 * size * lanes), y(2 * size * lanes);
  REQUIRE(model.kernel.values(0)(model.block.block(), lanes, s.data(), times.data(), s.data(), coefficients.data()) == TARN_OK);
  for (std::size_t i = 0; i < size; ++i) {
    for (std::size_t l = 0; l < lanes; ++l) {
      x[2 * i * lanes + l] = psi[static_cast<Eigen::Index>(i)].real();
      x[(2 * i + 1) * lanes + l] = psi[static_cast<Eigen::Index>(i)].imag();
    }
  }
  REQUIRE(model.kernel.prepare(runtime::kSchroedinger)(prepared.data()) == TARN_OK);
  REQUIRE(model.kernel.lane_apply(runtime::kSchroedinger)(coefficients.data(), prepared.data(), x.data(), y.data()) == TARN_OK);
  MatrixXcd result(psi.size(), static_cast<Eigen::Index>(lanes));
  for (std::size_t i = 0; i < size; ++i) {
    for (std::size_t l = 0; l < lanes; ++l) {
      result(static_cast<Eigen::Index>(i), static_cast<Eigen::Index>(l)) = {y[2 * i * lanes + l], y[(2 * i + 1) * lanes + l]};
    }
  }
  return result;
}

VectorXcd random_vector(Eigen::Index size, std::mt19937& random) {
  std::normal_distribution<double> normal;
  VectorXcd psi(size);
  for (auto& amplitude : psi) amplitude = {normal(random), normal(random)};
  return psi;
}

}  // namespace

TEST_CASE("compiled Hamiltonians equal Kronecker products", "[whole]") {
  std::vector<std::size_t> sizes(9);
  std::size_t lanes_seen = 0;
  for (unsigned seed = 1; seed <= 40; ++seed) {
    std::mt19937 random(seed);
    std::uniform_real_distribution<double> unit(0, 1);
    const double g = 4 * unit(random) - 2, f = 1 + 30 * unit(random);
    const RandomChip chip = random_chip(seed, g, f);
    INFO("seed " << seed << "\n" << chip.text);
    const TextModel model = text_model(chip.text, std::filesystem::temp_directory_path());
    REQUIRE(model.instance.qubits.size() == chip.qubits);
    ++sizes.at(chip.qubits);
    const Compiled compiled_chip = compile_chip(model, g, f);
    const VectorXcd psi = random_vector(Eigen::Index{1} << chip.qubits, random);
    for (const double s : {0.0, unit(random), unit(random), 1.0}) {
      const double t = 3 * unit(random);
      const MatrixXcd h = matrix_of(chip, s, t);
      REQUIRE((h - h.adjoint()).norm() <= 1e-13 * h.norm());
      CHECK((apply(compiled_chip, runtime::kHamiltonian, psi, s, t) - h * psi).norm() <= allowed(h, psi));
      CHECK((apply(compiled_chip, runtime::kSchroedinger, psi, s, t) + kI * (h * psi)).norm() <= allowed(h, psi));
    }
    if (compiled_chip.kernel.lane_apply(runtime::kSchroedinger) == nullptr) continue;
    ++lanes_seen;
    std::vector<double> s(compiled_chip.kernel.lanes());
    for (double& each : s) each = unit(random);
    const MatrixXcd columns = lane_apply(compiled_chip, psi, s, 0.7);
    for (std::size_t l = 0; l < s.size(); ++l) {
      const MatrixXcd h = matrix_of(chip, s[l], 0.7);
      CHECK((columns.col(static_cast<Eigen::Index>(l)) + kI * (h * psi)).norm() <= allowed(h, psi));
    }
  }
  for (std::size_t n = 1; n <= 8; ++n) CHECK(sizes[n] > 0);
  CHECK(lanes_seen > 0);
}
