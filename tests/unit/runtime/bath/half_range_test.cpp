/// \file Half-range transforms, whole and cut off at t.

#include "runtime/bath/half_range.h"

#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/bath/correlation.h"

using namespace tarn::runtime;
using Eigen::ArrayXcd;
using Eigen::ArrayXd;
using Complex = std::complex<double>;

namespace {

ThermalBath memory_bath(SpectralDensity density, double theta) {
  auto bath = ThermalBath::make(std::move(density), theta);
  REQUIRE(bath.has_value());
  return *bath;
}

const Tabulated kRows{{0.0, 3.0, 5.0, 9.0, 20.0}, {0.0, 0.3, 1.0, 0.2, 0.0}};

/// int_0^t s^power exp(iws) C(s) ds by Boost.Math 1.74, octave by octave from a time too short to matter.
Complex by_quadrature(const ThermalBath& bath, double t, double w, int power) {
  const CorrelationFunction c(bath);
  const auto part = [&](bool real, double a, double b) {
    return boost::math::quadrature::gauss_kronrod<double, 31>::integrate([&](double s) {
      const Complex value = std::pow(s, power) * std::polar(1.0, w * s) * c.at(s);
      return real ? value.real() : value.imag();
    }, a, b, 4, 1e-12);
  };
  Complex sum = 0.0;
  for (double b = t; b > 1e-13 * t; b *= 0.5) sum += Complex(part(true, 0.5 * b, b), part(false, 0.5 * b, b));
  return sum;
}

}  // namespace

TEST_CASE("the whole transform is gamma/2 + i S") {
  const ThermalBath bath = memory_bath({PowerLaw{0.01, 50.0, 1.0}, LorentzianPeak{0.1, 6.0, 0.5}}, 1.5);
  const HalfRange half(bath, 40.0);
  const ArrayXd w = ArrayXd::LinSpaced(201, -39.0, 41.0);
  const ArrayXcd gamma = half(w);
  CHECK(((gamma.real() - 0.5 * bath.rate(w)).abs() < 1e-14).all());
  CHECK(((gamma.imag() - ShiftFunction(bath)(w)).abs() < 1e-9 * bath.reorganisation() + half.error()).all());
}

// Boost.Math quadrature of the definition.
TEST_CASE("the growing transform and its moment are the integrals of their definitions") {
  const std::vector<std::pair<SpectralDensity, double>> cases = {
      {{PowerLaw{0.01, 50.0, 1.0}}, 1.5}, {{PowerLaw{0.01, 50.0, 1.0}}, 0.0}, {{Drude{0.01, 8.0}}, 1.5},
      {{Drude{0.01, 8.0}}, 0.0}, {{LorentzianPeak{0.3, 20.0, 0.5}, Drude{0.01, 8.0}}, 1.5}, {{kRows}, 1.5}};
  for (const auto& [density, theta] : cases) {
    const ThermalBath bath = memory_bath(density, theta);
    const GrowingHalfRange half(bath, 3.0);
    CHECK(half.error() < 1e-10 * bath.reorganisation());
    ArrayXd w(4);
    w << -30.0, 0.0, 2.3, 70.0;
    for (const double t : {0.003, 0.4}) {
      const ArrayXcd gamma = half(t, w);
      const ArrayXcd moment = half.first_moment(t, w);
      for (Eigen::Index i = 0; i < w.size(); ++i) {
        CAPTURE(density.size(), density[0].index(), theta, t, w[i]);
        CHECK(std::abs(gamma[i] - by_quadrature(bath, t, w[i], 0)) < 2e-10 * bath.reorganisation());
        CHECK(std::abs(moment[i] - by_quadrature(bath, t, w[i], 1) / t) < 2e-10 * bath.reorganisation());
      }
    }
    CHECK(half(0.0, w).abs().maxCoeff() == 0.0);
  }
}

// Closed form: int_0^t exp(iws) c exp(-nu s), by residues of a Drude bath (J. Chem. Phys. 130, 234111 (2009)), memory 1/nu.
TEST_CASE("a Drude bath forgets exponentially: the growing transform reaches the whole one") {
  const ThermalBath bath = memory_bath({Drude{0.01, 8.0}}, 1.5);
  const GrowingHalfRange growing(bath, 10.0);
  const HalfRange whole(bath, 40.0, 1e-12);
  const ArrayXd w = ArrayXd::LinSpaced(41, -40.0, 40.0);
  CHECK((growing(10.0, w) - whole(w)).abs().maxCoeff() < 1e-10 * bath.reorganisation());
}

// |C| -> 2 eta theta/(cutoff t^2): the cusp of J coth at w = 0. Quantum Dissipative Systems (World Scientific).
TEST_CASE("an exponential cut-off: gamma(0)/2 is reached as 2 eta theta/(cutoff t) only") {
  const double eta = 0.01, cutoff = 50.0, theta = 1.5;
  const ThermalBath bath = memory_bath({PowerLaw{eta, cutoff, 1.0}}, theta);
  const GrowingHalfRange half(bath, 400.0);
  const ArrayXd zero = ArrayXd::Zero(1);
  for (const double t : {20.0, 100.0, 400.0}) {
    const double missing = half(t, zero)[0].real() - 0.5 * bath.rate(zero)[0];
    CAPTURE(t);
    CHECK(missing == Approx(-2 * eta * theta / (cutoff * t)).epsilon(3.0 / (theta * t)));
  }
}
