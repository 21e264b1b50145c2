#include <algorithm>
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

TEST_CASE("two lanes of unlike problems each meet their own tolerance and times") {
  ExplicitIntegrator integrator(1, 2);
  integrator.state()[0] = integrator.state()[1] = 1;
  const std::vector<double> short_way = {0, 1}, long_way = {0, 0.5, 40}, few = {1}, many = {0, 0.5, 7, 40};
  const std::vector<LaneTask> tasks = {{short_way, few, 1e-6}, {long_way, many, 1e-11}};
  std::vector<std::vector<double>> errors(2);
  Cosine problem{2, {}};
  const auto outcome = integrator.run(
      problem.side(), tasks,
      [&](std::size_t lane, std::size_t index, const double* y) {
        REQUIRE(index == errors[lane].size());
        errors[lane].push_back(std::abs(y[lane] - std::exp(std::sin(tasks[lane].times[index]))));
      },
      {});
  CHECK(!outcome[0]);
  CHECK(!outcome[1]);
  REQUIRE(errors[0].size() == 1);
  REQUIRE(errors[1].size() == 4);
  CHECK(errors[0][0] < 1e-5);
  for (const double error : errors[1]) CHECK(error < 2e-10);
  CHECK(integrator.counters(0).steps < 6);
  CHECK(integrator.counters(1).steps < 320);
  CHECK(integrator.counters(1).evaluations <
        12 * (integrator.counters(1).steps + integrator.counters(1).rejected) + 20);
}

TEST_CASE("what cannot be integrated says why and where") {
  const std::vector<double> way = {0, 2};
  const LaneTask task{way, {}, 1e-8};
  const auto run = [&](double (*slope)(double t, double y)) {
    ExplicitIntegrator integrator(1, 1);
    integrator.state()[0] = 1;
    std::vector<double> at;
    const RightHandSide side{
        [&](const Nodes& nodes, bool*) { at.assign(nodes.t.begin(), nodes.t.end()); },
        [&](std::size_t node, std::size_t count, const double* weights, const double* const* vectors,
            double* argument, double* derivative) {
          argument[0] = 0;
          for (std::size_t j = 0; j < count; ++j) argument[0] += weights[j] * vectors[j][0];
          derivative[0] = slope(at[node], argument[0]);
        }};
    return integrator.run(side, std::span(&task, 1), {}, {})[0];
  };
  SECTION("a solution that blows up at t = 1: dy/dt = y^2") {
    const auto failure = run([](double, double y) { return y * y; });
    REQUIRE(failure);
    CHECK(failure->t == Approx(1).margin(1e-3));
  }
  SECTION("a right-hand side that is not a number beyond t = 1.5") {
    const auto failure = run([](double t, double y) { return t > 1.5 ? std::nan("") : y; });
    REQUIRE(failure);
    CHECK(failure->kind == FailureKind::not_finite);
    CHECK(failure->t == Approx(1.5).margin(1e-9));
  }
  SECTION("noise that no step resolves") {
    const auto failure = run([](double t, double) { return 1e12 * std::sin(1e30 * t); });
    REQUIRE(failure);
    CHECK(failure->kind == FailureKind::step_underflow);
  }
}

TEST_CASE("sweeps over arrays: combinations, norms, copies, for every number of lanes") {
  for (const std::size_t lanes : {1u, 2u, 4u, 8u}) {
    AlignedArray a(48), b(48), out(48);
    for (std::size_t i = 0; i < 48; ++i) {
      a.data()[i] = static_cast<double>(i);
      b.data()[i] = 1;
    }
    std::vector<double> weights(2 * lanes), squared(lanes), second(lanes);
    for (std::size_t l = 0; l < lanes; ++l) {
      weights[l] = 2;
      weights[lanes + l] = static_cast<double>(l);
    }
    const std::array<const double*, 2> vectors = {a.data(), b.data()};
    combine(48, lanes, vectors, weights.data(), out.data());
    for (std::size_t i = 0; i < 48; ++i)
      CHECK(out.data()[i] == 2 * static_cast<double>(i) + static_cast<double>(i % lanes));
    combined_squares(48, lanes, vectors, weights.data(), weights.data(), squared.data(), second.data());
    for (std::size_t l = 0; l < lanes; ++l) {
      double expected = 0;
      for (std::size_t i = l; i < 48; i += lanes) expected += out.data()[i] * out.data()[i];
      CHECK(squared[l] == Approx(expected));
      CHECK(second[l] == squared[l]);
    }
  }
}

TEST_CASE("a large system is stopped between two stages of a step") {
  constexpr std::size_t kSize = std::size_t{1} << 18;
  ExplicitIntegrator integrator(kSize, 1);
  integrator.state()[0] = 1;
  std::size_t stages = 0;
  const RightHandSide still{[](const Nodes&, bool*) {},
                            [&](std::size_t, std::size_t, const double*, const double* const* vectors, double* argument,
                                double* derivative) {
                              ++stages;
                              std::copy_n(vectors[0], kSize, argument);
                              std::copy_n(vectors[0], kSize, derivative);
                            }};
  const std::vector<double> boundaries = {0, 1};
  const LaneTask task{boundaries, {}, 1e-8};
  const auto outcome =
      integrator.run(still, std::span(&task, 1), [](std::size_t, std::size_t, const double*) {}, [&] { return stages >= 4; });
  REQUIRE(outcome[0]);
  CHECK(outcome[0]->kind == FailureKind::interrupted);
  CHECK(stages == 4);
  CHECK(integrator.state()[0] == 1);  // that of the last good step
}
