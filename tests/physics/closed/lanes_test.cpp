#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <memory>

#include "runtime/equation/lindblad.h"
#include "runtime/equation/schroedinger.h"
#include "tests/physics/closed/model.h"

using namespace tarn;
using namespace tarn::test;

namespace {

constexpr std::size_t kPoints = 6;

/// One point: its own strengths, pace, times and tolerance.
struct Point {
  double d, eps;
  runtime::Timeline timeline;
  std::vector<double> breaks, times;
  double tolerance;
};

std::array<Point, kPoints> points() {
  const auto ramp_and_hold = [](double over, double hold) {
    return runtime::Timeline{{{0, over, 0, 0.6}, {over, over + hold, 0.6, 0.6}, {over + hold, 2 * over + hold, 0.7, 1}}, 0, 1};
  };
  return {{{1.0, 4.0, ramp(5), {}, {5}, 1e-8},
           {2.0, 1.0, ramp_and_hold(3, 200), {1.5}, {0, 1, 3, 100, 206}, 1e-6},
           {0.3, 9.0, ramp(60), {30}, {0.1, 0.2, 0.3, 59, 60}, 1e-10},
           {1.5, 0.0, {{}, 0.3, 0.3}, {}, {0}, 1e-8},
           {0.7, 3.0, ramp_and_hold(8, 5), {}, {21}, 1e-9},
           {2.5, 2.5, ramp(1), {}, {0.5, 1}, 1e-5}}};
}

/// `order[lane]` is the point that a lane reads.
Model model_of_points(const std::array<Point, kPoints>& all, std::shared_ptr<std::vector<std::size_t>> order,
               bool open, std::uint32_t lanes) {
  Model model;
  model.lanes = lanes;
  model.bits = open ? 2 : 1;
  const auto x = on('x', 0, 1), z = on('z', 0, 1);
  if (open) model.parts = {commutator(x), commutator(z), dissipator(on('m', 0, 1))};
  else model.parts = {closed(x), closed(z)};
  model.coefficients = [all, order, open](std::size_t lane, double s, double, double* rows) {
    const Point& point = all[lane < order->size() ? (*order)[lane] : order->front()];
    rows[0] = -point.d * (1 - s);
    rows[1] = -point.eps * s;
    if (open) rows[2] = 0.02;
  };
  return model;
}

/// What every visit of every point in `order` saw, as plain numbers, by point.
std::vector<std::vector<double>> run(const std::array<Point, kPoints>& all, std::vector<std::size_t> order,
                                     bool open, std::uint32_t lanes) {
  std::vector<std::vector<double>> seen(kPoints);
  const auto shared = std::make_shared<std::vector<std::size_t>>(order);
  const Model model = model_of_points(all, shared, open, lanes);
  std::vector<runtime::LinearRun> runs;
  std::vector<runtime::Visit> visits;
  for (const std::size_t p : order) {
    runs.push_back({&all[p].timeline, all[p].breaks, all[p].times, all[p].tolerance});
    visits.push_back([&seen, p](std::size_t, const runtime::State& state) {
      std::visit([&](const auto& numbers) {
        for (Eigen::Index i = 0; i < numbers.size(); ++i) {
          seen[p].push_back(numbers.data()[i].real());
          seen[p].push_back(numbers.data()[i].imag());
        }
      }, state);
    });
  }
  const runtime::Ket ket = runtime::Ket::Constant(2, std::sqrt(0.5));
  const runtime::Density rho = ket * ket.adjoint();
  const auto outcomes =
      open ? propagate_lindblad_lanes(model.lane_entries(), model.block(), runs,
                                      std::vector<runtime::Density>(order.size(), rho), visits, {})
           : propagate_schroedinger_lanes(model.lane_entries(), model.block(), runs,
                                          std::vector<runtime::Ket>(order.size(), ket), visits, {});
  for (const auto& outcome : outcomes) REQUIRE(outcome.has_value());
  return seen;
}

}  // namespace

TEST_CASE("a point's bits do not depend on its neighbours nor on its lane") {
  const auto all = points();
  for (const bool open : {false, true}) {
    const auto together = run(all, {0, 1, 2, 3, 4, 5}, open, 8);
    const auto otherwise = run(all, {5, 2, 4, 0, 3, 1}, open, 8);
    for (std::size_t p = 0; p < kPoints; ++p) {
      INFO("point " << p << " open " << open);
      REQUIRE(together[p].size() == all[p].times.size() * (open ? 8 : 4));
      CHECK(together[p] == otherwise[p]);
      CHECK(together[p] == run(all, {p}, open, 8)[p]);
    }
  }
}

TEST_CASE("lanes give what one point at a time gives, within the tolerance") {
  const auto all = points();
  for (const bool open : {false, true}) {
    const auto together = run(all, {0, 1, 2, 3, 4, 5}, open, 8);
    for (std::size_t p = 0; p < kPoints; ++p) {
      const auto alone = run(all, {p}, open, 1)[p];
      REQUIRE(alone.size() == together[p].size());
      for (std::size_t i = 0; i < alone.size(); ++i)
        CHECK(together[p][i] == Approx(alone[i]).margin(10 * all[p].tolerance));
    }
  }
}

TEST_CASE("a lane that fails leaves the others alone") {
  const auto all = points();
  const auto order = std::make_shared<std::vector<std::size_t>>(std::vector<std::size_t>{0, 2, 4});
  Model model = model_of_points(all, order, false, 4);
  const auto healthy = model.coefficients;
  model.coefficients = [healthy](std::size_t lane, double s, double t, double* rows) {
    healthy(lane, s, t, rows);
    if (lane == 1 && s > 0.4) rows[0] = std::numeric_limits<double>::infinity();
  };
  std::vector<runtime::LinearRun> runs;
  std::vector<Eigen::VectorXcd> last(3);
  std::vector<runtime::Visit> visits;
  for (std::size_t l = 0; l < 3; ++l) {
    const Point& point = all[(*order)[l]];
    runs.push_back({&point.timeline, point.breaks, point.times, point.tolerance});
    visits.push_back([&last, l](std::size_t, const runtime::State& state) { last[l] = std::get<runtime::Ket>(state); });
  }
  const std::vector<runtime::Ket> kets(3, runtime::Ket::Constant(2, std::sqrt(0.5)));
  const auto outcomes = propagate_schroedinger_lanes(model.lane_entries(), model.block(), runs, kets, visits, {});
  CHECK(outcomes[0].has_value());
  REQUIRE(!outcomes[1].has_value());
  CHECK(outcomes[1].error().kind == "not_finite");
  CHECK(outcomes[2].has_value());
  const auto expected = run(all, {0, 4}, false, 4);
  CHECK(last[0][1].imag() == expected[0].back());
  CHECK(last[2][1].imag() == expected[4].back());
}
