#include <catch2/catch.hpp>
#include <cmath>
#include <numbers>

#include "runtime/integrate/explicit.h"

using namespace tarn::runtime;

namespace {

/// dy/dt = y cos(t) per lane, y(t) = exp(sin t): a textbook problem with time-dependent coefficient.
struct Cosine {
  std::size_t width;
  std::vector<double> at;
  RightHandSide side() {
    return {[this](const Nodes& nodes, bool*) { at.assign(nodes.t.begin(), nodes.t.end()); },
            [this](std::size_t node, std::size_t count, const double* weights,
                   const double* const* vectors, double* argument, double* derivative) {
              for (std::size_t l = 0; l < width; ++l) {
                argument[l] = 0;
                for (std::size_t j = 0; j < count; ++j) argument[l] += weights[j * width + l] * vectors[j][l];
                derivative[l] = std::cos(at[node * width + l]) * argument[l];
              }
            }};
  }
};

/// Error at the end and in the middle of the last step for `steps` equal steps over [0, 2].
std::pair<double, double> fixed_step_errors(std::size_t steps) {
  ExplicitIntegrator integrator(1, 1);
  integrator.state()[0] = 1;
  std::vector<double> boundaries;
  for (std::size_t i = 0; i <= steps; ++i)
    boundaries.push_back(2.0 * static_cast<double>(i) / static_cast<double>(steps));
  const double middle = (boundaries[steps] + 3 * boundaries[steps - 1]) / 4;
  const std::vector<double> times = {middle};
  // No error is too large, and no first step is longer than the piece: one step for each piece.
  const LaneTask task{boundaries, times, 1e300};
  double inside = 0;
  Cosine problem{1, {}};
  const auto outcome = integrator.run(
      problem.side(), std::span(&task, 1),
      [&](std::size_t, std::size_t, const double* y) { inside = std::abs(y[0] - std::exp(std::sin(middle))); },
      {});
  REQUIRE(!outcome[0]);
  REQUIRE(integrator.counters(0).steps == steps);
  return {std::abs(integrator.state()[0] - std::exp(std::sin(2.0))), inside};
}

}  // namespace

TEST_CASE("equal steps converge with order 8, the interpolant with order 7 or better") {
  const auto [end_coarse, inside_coarse] = fixed_step_errors(3);
  const auto [end_fine, inside_fine] = fixed_step_errors(6);
  const double order = std::log2(end_coarse / end_fine);
  CHECK(order > 7.5);
  CHECK(order < 9.5);
  CHECK(std::log2(inside_coarse / inside_fine) > 6.7);
}
