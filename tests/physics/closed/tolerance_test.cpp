#include <catch2/catch.hpp>
#include <cmath>
#include <random>

#include "tests/physics/closed/model.h"

using namespace tarn;
using namespace tarn::test;

namespace {

/// Two or three qubits with random fields and couplings along a smooth anneal, and a drive now and then.
Model random_anneal(unsigned seed) {
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> number(-1, 1);
  const std::size_t n = 2 + seed % 2;
  const auto size = Eigen::Index{1} << n;
  Sparse field(size, size), problem(size, size), drive(size, size);
  for (std::size_t q = 0; q < n; ++q) {
    field += (1 + 0.2 * number(random)) * on('x', q, n);
    problem += number(random) * on('z', q, n);
    drive += number(random) * on('y', q, n);
    if (q > 0) problem += number(random) * Sparse(on('z', q - 1, n) * on('z', q, n));
  }
  Model model;
  model.bits = static_cast<std::uint32_t>(n);
  model.parts = {closed(field), closed(problem), closed(drive)};
  model.reads_t = seed % 3 == 0;
  const double strength = model.reads_t ? 0.5 : 0, frequency = 3 + number(random);
  model.coefficients = [=](std::size_t, double s, double t, double* rows) {
    rows[0] = -3 * std::exp(-3 * s);
    rows[1] = 6 * s * s;
    rows[2] = strength * std::cos(frequency * t);
  };
  return model;
}

}  // namespace

// No source: the experiment estimates the error of an answer by a second run at a tenth of the tolerance,
// which is right if and only if the error follows the tolerance.
TEST_CASE("the error of a run is a few tolerances and follows the tolerance") {
  double slopes = 0;
  int problems = 0;
  for (unsigned seed = 1; seed <= 12; ++seed) {
    const Model model = random_anneal(seed);
    const double duration = seed % 4 == 0 ? 300 : 3 * seed;
    const auto size = Eigen::Index{1} << model.bits;
    const Eigen::VectorXcd start = Eigen::VectorXcd::Constant(size, 1 / std::sqrt(static_cast<double>(size)));
    const auto end = [&](double tolerance) {
      return run_closed(model, ramp(duration), start, tolerance, {duration}).states[0];
    };
    const auto exact = end(1e-13);
    const std::vector<double> tolerances = {1e-5, 1e-6, 1e-7, 1e-8, 1e-9};
    std::vector<Eigen::VectorXcd> ends;
    std::vector<double> errors;
    for (const double tolerance : tolerances) {
      ends.push_back(end(tolerance));
      errors.push_back((ends.back() - exact).norm());
    }
    for (std::size_t i = 0; i < errors.size(); ++i) {
      INFO("seed " << seed << " tolerance " << tolerances[i] << " error " << errors[i]);
      CHECK(errors[i] < 10 * tolerances[i]);
      if (i + 1 == errors.size()) continue;
      const double estimate = (ends[i] - ends[i + 1]).norm();
      CHECK(estimate > 0.3 * errors[i]);
      CHECK(estimate < 10 * tolerances[i]);
    }
    slopes += std::log10(errors.front() / errors.back()) / 4;
    ++problems;
  }
  CHECK(slopes / problems == Approx(1).margin(0.15));
}
