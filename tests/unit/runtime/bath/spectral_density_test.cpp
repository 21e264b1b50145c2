/// \file Spectral densities: values, checks of what the user gave, messages.

#include "runtime/bath/spectral_density.h"

#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/bath/thermal_bath.h"

using namespace tarn::runtime;

namespace {

double value(const Component& component, double w) { return spectral_density(component, Eigen::ArrayXd::Constant(1, w))[0]; }

BathErrorCode refused(Component component, double theta = 1.0) {
  const auto bath = ThermalBath::make({std::move(component)}, theta);
  REQUIRE_FALSE(bath.has_value());
  CHECK_FALSE(to_text(bath.error()).empty());
  return bath.error().code;
}

Sampled sampled(double (*f)(double)) {
  return {[f](std::span<const double> w, double* j) {
    for (std::size_t i = 0; i < w.size(); ++i) j[i] = f(w[i]);
  }};
}

}  // namespace

TEST_CASE("J has the value of its formula and is odd") {
  CHECK(value(PowerLaw{0.01, 50.0, 1.0}, 3.0) == Approx(0.03 * std::exp(-0.06)).epsilon(1e-15));
  CHECK(value(PowerLaw{0.01, 50.0, 0.5}, 2.0) == Approx(0.02 * 5.0 * std::exp(-0.04)).epsilon(1e-14));
  CHECK(value(Drude{0.01, 4.0}, 4.0) == Approx(0.02).epsilon(1e-15));
  // At its centre the peak is (2/pi) lambda centre/width.
  CHECK(value(LorentzianPeak{0.3, 7.0, 0.5}, 7.0) == Approx(2.0 / M_PI * 0.3 * 14.0).epsilon(1e-14));
  for (const Component& c : {Component(PowerLaw{0.01, 50.0, 3.0}), Component(Drude{1.0, 2.0}), Component(LorentzianPeak{1.0, 2.0, 0.1})}) {
    CHECK(value(c, -1.7) == -value(c, 1.7));
    CHECK(value(c, 0.0) == 0.0);
  }
}

TEST_CASE("tables are interpolated between rows and vanish outside") {
  const Tabulated linear{{0.0, 1.0, 3.0}, {0.0, 2.0, 1.0}};
  CHECK(value(linear, 0.25) == Approx(0.5));
  CHECK(value(linear, 1.0) == 2.0);
  CHECK(value(linear, 2.0) == Approx(1.5));
  CHECK(value(linear, 3.0) == 1.0);
  CHECK(value(linear, 3.1) == 0.0);
  CHECK(value(linear, -2.0) == Approx(-1.5));
  const Tabulated power{{1.0, 4.0, 16.0}, {2.0, 32.0, 512.0}, Interpolation::log_log};
  CHECK(value(power, 3.0) == Approx(18.0).epsilon(1e-14));  // 2 w^2
  CHECK(value(power, 0.5) == 0.0);
}

TEST_CASE("what is out of range is refused by name") {
  CHECK(refused(PowerLaw{-1.0, 1.0, 1.0}) == BathErrorCode::out_of_range);
  CHECK(refused(PowerLaw{1.0, 0.0, 1.0}) == BathErrorCode::out_of_range);
  CHECK(refused(PowerLaw{1.0, 1.0, 0.0}) == BathErrorCode::out_of_range);
  CHECK(refused(Drude{1.0, std::nan("")}) == BathErrorCode::out_of_range);
  CHECK(refused(LorentzianPeak{1.0, 1.0, 0.0}) == BathErrorCode::out_of_range);
  CHECK(refused(Drude{1.0, 1.0}, -0.1) == BathErrorCode::out_of_range);
  CHECK(refused(Tabulated{{1.0}, {1.0}}) == BathErrorCode::bad_table);
  CHECK(refused(Tabulated{{1.0, 2.0}, {1.0}}) == BathErrorCode::bad_table);
  CHECK(refused(Tabulated{{2.0, 1.0}, {1.0, 1.0}}) == BathErrorCode::bad_table);
  CHECK(refused(Tabulated{{0.0, 1.0}, {1.0, 1.0}}) == BathErrorCode::bad_table);
  CHECK(refused(Tabulated{{0.0, 1.0}, {0.0, 1.0}, Interpolation::log_log}) == BathErrorCode::bad_table);
  CHECK(refused(sampled([](double w) { return std::sin(w); })) == BathErrorCode::negative_density);
  CHECK(refused(sampled([](double w) { return std::exp(-w); })) == BathErrorCode::zero_rate_diverges);
  const auto two = ThermalBath::make({Drude{1.0, 1.0}, Drude{1.0, -2.0}}, 1.0);
  REQUIRE_FALSE(two.has_value());
  CHECK(two.error().component == 1);
  CHECK(two.error().parameter == "cutoff");
}

TEST_CASE("a sub-ohmic bath has no rate at zero frequency, and says so") {
  const auto bath = ThermalBath::make({Drude{0.01, 3.0}, PowerLaw{0.01, 50.0, 0.5}}, 1.5);
  REQUIRE(bath.has_value());
  const auto rate = bath->zero_rate();
  REQUIRE_FALSE(rate.has_value());
  CHECK(rate.error().code == BathErrorCode::zero_rate_diverges);
  CHECK(rate.error().component == 1);
  const auto function = ThermalBath::make({sampled([](double w) { return std::sqrt(w) * std::exp(-w); })}, 1.5);
  REQUIRE(function.has_value());
  CHECK_FALSE(function->zero_rate().has_value());
  const auto cold = ThermalBath::make({PowerLaw{0.01, 50.0, 0.5}}, 0.0);
  REQUIRE(cold.has_value());
  CHECK(cold->zero_rate().value() == 0.0);
}
