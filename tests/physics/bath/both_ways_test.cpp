/// \file Every family of spectral densities goes both ways: by its closed forms, and as an
/// unknown function through Legendre panels. C, gamma and S must agree to 1e-9 of their
/// scales (C(1/cutoff), gamma itself, lambda): two computations that share nothing but J.

#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/bath/correlation.h"
#include "runtime/bath/power_law_bath.h"
#include "runtime/bath/rational_density.h"
#include "runtime/bath/shift.h"
#include "runtime/bath/thermal_bath.h"

using namespace tarn::runtime;
using Eigen::ArrayXd;

namespace {

ThermalBath bath_of(const Component& component, double theta) {
  auto bath = ThermalBath::make({component}, theta);
  REQUIRE(bath.has_value());
  return *bath;
}

/// The same J, its structure hidden.
Sampled hidden(const Component& component) {
  return {[component](std::span<const double> w, double* j) {
    const Eigen::Map<const ArrayXd> x(w.data(), std::ssize(w));
    Eigen::Map<ArrayXd>(j, std::ssize(w)) = spectral_density(component, x);
  }};
}

struct Family {
  const char* name;
  Component component;
  double frequency;  ///< A typical one [rad/ns].
};

std::vector<Family> families() {
  return {
      {"ohmic", PowerLaw{0.01, 50.0, 1.0}, 50.0},
      {"super-ohmic 3", PowerLaw{0.02, 12.0, 3.0}, 12.0},
      {"between 1.7", PowerLaw{0.02, 30.0, 1.7}, 30.0},
      {"sub-ohmic 0.5", PowerLaw{0.01, 20.0, 0.5}, 20.0},
      {"drude", Drude{0.003, 8.0}, 8.0},
      {"drude on a Matsubara frequency", Drude{0.003, 2 * M_PI * 1.5 * 2}, 18.0},
      {"drude near a Matsubara frequency", Drude{0.003, 2 * M_PI * 1.5 * 2 * (1 + 3e-6)}, 18.0},
      {"ringing peak", LorentzianPeak{0.4, 6.0, 0.3}, 6.0},
      {"narrow peak", LorentzianPeak{0.4, 6.0, 0.003}, 6.0},
      {"steep power", PowerLaw{1e-5, 4.0, 8.0}, 30.0},
      {"critically damped peak", LorentzianPeak{0.4, 6.0, 12.0}, 6.0},
      {"overdamped peak", LorentzianPeak{0.4, 6.0, 40.0}, 20.0},
      {"overdamped peak, one rate on a Matsubara frequency", LorentzianPeak{0.4, 6.0, 3 * M_PI + 12.0 / M_PI}, 10.0},
  };
}

const double kTemperatures[] = {0.0, 0.01, 1.5, 40.0};

}  // namespace

TEST_CASE("gamma, S and lambda agree both ways") {
  for (const Family& family : families())
    for (const double theta : kTemperatures) {
      CAPTURE(family.name, theta);
      const ThermalBath closed = bath_of(family.component, theta);
      const ThermalBath open = bath_of(hidden(family.component), theta);
      CHECK(open.reorganisation() == Approx(closed.reorganisation()).epsilon(1e-11));
      const ShiftFunction closed_shift(closed);
      const ShiftFunction open_shift(open);
      ArrayXd w(13);
      w << -5, -1.3, -1, -0.1, -1e-3, -1e-7, 1e-7, 1e-3, 0.1, 0.8, 1, 1.3, 5;
      w *= family.frequency;
      const ArrayXd rate = closed.rate(w);
      CHECK(((open.rate(w) - rate).abs() <= 1e-12 * rate).all());
      const ArrayXd shift = closed_shift(w);
      const ArrayXd error = (open_shift(w) - shift).abs() / (closed.reorganisation() + rate + shift.abs());
      CAPTURE(error.transpose());
      CHECK(error.maxCoeff() < 1e-9);
    }
}

TEST_CASE("C agrees both ways") {
  for (const Family& family : families())
    for (const double theta : kTemperatures) {
      CAPTURE(family.name, theta);
      const CorrelationFunction closed(bath_of(family.component, theta));
      const CorrelationFunction open(bath_of(hidden(family.component), theta));
      const double scale = std::abs(closed.at(1.0 / family.frequency));
      for (const double t : {1e-4, 0.01, 0.1, 0.5, 1.0, 3.0, 10.0, 100.0, 1e4}) {
        const auto exact = closed.at(t / family.frequency);
        const auto other = open.at(t / family.frequency);
        CAPTURE(t, exact, other);
        CHECK(std::abs(other - exact) < 1e-9 * std::max(scale, std::abs(exact)));
        CHECK(closed.at(-t / family.frequency) == std::conj(exact));
      }
    }
}

TEST_CASE("C(0) agrees both ways where it exists; a Drude bath has none") {
  for (const double theta : kTemperatures)
    for (const Component& component : {Component(PowerLaw{0.02, 30.0, 1.7}), Component(LorentzianPeak{0.4, 6.0, 0.3}), Component(LorentzianPeak{0.4, 6.0, 40.0})}) {
      CAPTURE(theta, component.index());
      const double closed = CorrelationFunction(bath_of(component, theta)).at(0.0).real();
      CHECK(CorrelationFunction(bath_of(hidden(component), theta)).at(0.0).real() == Approx(closed).epsilon(1e-9));
    }
  CHECK(std::isinf(CorrelationFunction(bath_of(Drude{0.003, 8.0}, 1.5)).at(0.0).real()));
}

TEST_CASE("the logarithms of a table's rows are not resolved by polynomials") {
  Tabulated table;
  for (int i = 0; i <= 30; ++i) {
    table.w.push_back(2.0 * i);
    table.j.push_back(i < 30 ? 0.02 * i * std::exp(-0.25 * i) : 0.0);
  }
  const ShiftTable fast(ShiftFunction(bath_of(table, 1.5)), 60.0);
  // By bisection alone it took 51000 values of S; with the logarithms apart 3300.
  CHECK(fast.evaluations() < 5000);
}

TEST_CASE("S(0) = -lambda at every temperature") {
  for (const Family& family : families())
    for (const double theta : kTemperatures) {
      CAPTURE(family.name, theta);
      const ThermalBath bath = bath_of(family.component, theta);
      const ShiftFunction shift(bath);
      CHECK(shift.at(0.0) == Approx(-bath.reorganisation()).epsilon(1e-11));
      CHECK(ShiftFunction(bath_of(hidden(family.component), theta)).at(0.0) == Approx(-bath.reorganisation()).epsilon(1e-11));
    }
}

TEST_CASE("the half-range transforms have gamma/2 as their real parts") {
  for (const double theta : {0.01, 1.5, 40.0})
    for (const double w : {-9.0, -0.2, 1e-4, 3.0, 20.0}) {
      CAPTURE(theta, w);
      const auto half_rate = [&](const Component& c) { return 0.5 * bath_of(c, theta).rate(ArrayXd::Constant(1, w))[0]; };
      const PowerLaw law{0.02, 30.0, 1.7};
      const Drude drude{0.003, 8.0};
      const LorentzianPeak peak{0.4, 6.0, 0.3};
      CHECK(PowerLawTransform(law, theta)(w).real() == Approx(half_rate(law)).epsilon(1e-11).margin(1e-12));
      CHECK(rational_transform(poles_of(drude, theta), theta, w).real() == Approx(half_rate(drude)).epsilon(1e-11).margin(1e-13));
      CHECK(rational_transform(poles_of(peak, theta), theta, w).real() == Approx(half_rate(peak)).epsilon(1e-11).margin(1e-13));
    }
}

TEST_CASE("a sum of components is the sum of their baths") {
  const Component a = PowerLaw{0.01, 50.0, 1.0};
  const Component b = LorentzianPeak{0.4, 6.0, 0.3};
  const auto both = ThermalBath::make({a, b}, 1.5);
  REQUIRE(both.has_value());
  const ThermalBath first = bath_of(a, 1.5);
  const ThermalBath second = bath_of(b, 1.5);
  const ArrayXd w = ArrayXd::LinSpaced(9, -20.0, 20.0);
  CHECK(both->rate(w).isApprox(first.rate(w) + second.rate(w), 1e-14));
  CHECK(ShiftFunction(*both)(w).isApprox(ShiftFunction(first)(w) + ShiftFunction(second)(w), 1e-13));
  const ArrayXd t = ArrayXd::LinSpaced(5, -1.0, 1.0);
  CHECK(CorrelationFunction(*both)(t).isApprox(CorrelationFunction(first)(t) + CorrelationFunction(second)(t), 1e-13));
}

TEST_CASE("the table of S keeps its error bound") {
  const Component table = Tabulated{{0.0, 3.0, 5.0, 9.0, 20.0}, {0.0, 0.3, 1.0, 0.2, 0.0}};
  std::vector<Family> all = families();
  all.push_back({"table", table, 5.0});
  for (const Family& family : all)
    for (const double theta : {0.0, 1.5}) {
      if (theta > 0.0 && std::string_view(family.name) == "sub-ohmic 0.5") continue;
      CAPTURE(family.name, theta);
      const ShiftFunction shift(bath_of(family.component, theta));
      const ShiftTable fast(shift, 2.0 * family.frequency);
      // The narrow peak has |S| near 900 lambda, and a table relative to that.
      const double size = std::string_view(family.name) == "narrow peak" ? 1e3 * shift.scale() : shift.scale();
      const double peak = std::string_view(family.name) == "ringing peak" ? 10.0 : 1.0;
      CHECK(fast.error() <= 1e-10 * peak * size);
      ArrayXd w = 2.0 * family.frequency * ArrayXd::Random(300);
      w.head(100) *= 1e-3;
      w[0] = 0.0;
      w[1] = 2.5 * family.frequency;
      CAPTURE(fast.evaluations());
      CHECK((fast(w) - shift(w)).abs().maxCoeff() < 1e-10 * peak * size);
    }
}
