/// \file Sums of exponentials for the correlation functions of baths.

#include "runtime/bath/exponential_sum.h"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <map>

#include "runtime/bath/correlation.h"
#include "runtime/bath/shift.h"

using namespace tarn::runtime;
using Eigen::ArrayXd;
using Complex = std::complex<double>;

namespace {

ThermalBath bath_of(SpectralDensity density, double theta) {
  auto bath = ThermalBath::make(std::move(density), theta);
  REQUIRE(bath.has_value());
  return *bath;
}

double rate_of(const ThermalBath& bath, double w) { return bath.rate(ArrayXd::Constant(1, w))[0]; }

double worst_c(const ThermalBath& bath, const ExponentialSum& sum, double from, double to) {
  const CorrelationFunction c(bath);
  double worst = 0.0;
  for (double t = from; t < to; t *= 1.07) worst = std::max(worst, std::abs(c.at(t) - correlation(sum, t)));
  return worst;
}

void check_partners(const ExponentialSum& sum) {
  for (const Exponential& term : sum.terms) {
    CHECK(term.rate.real() > 0.0);
    const bool paired = std::any_of(sum.terms.begin(), sum.terms.end(), [&](const Exponential& other) {
      return std::abs(other.rate - std::conj(term.rate)) < 1e-12 * std::abs(term.rate) &&
             std::abs(other.coefficient - std::conj(term.conjugate)) < 1e-9 * std::abs(term.coefficient) + 1e-300;
    });
    CHECK(paired);
  }
}

}  // namespace

// Hot limit: J coth(w/2 theta) -> 2 theta J/w, so Re C = 2 lambda theta exp(-nu t), Im C = -lambda nu exp(-nu t):
// closed form, corrections of order nu/theta. Quantum Dissipative Systems (World Scientific).
TEST_CASE("a hot Drude bath is one exponential") {
  const double nu = 0.5, theta = 5e3, eta = 1e-3;
  const double lambda = M_PI * eta * nu / 2;
  const auto sum = pade_sum(bath_of({Drude{eta, nu}}, theta), 1, 50.0, 2.0);
  REQUIRE(sum.has_value());
  REQUIRE(sum->terms.size() == 2);
  const Exponential& slow = sum->terms.front();
  CHECK(slow.rate.real() == Approx(nu).epsilon(1e-14));
  CHECK(slow.coefficient.real() == Approx(2 * lambda * theta).epsilon(1e-7));
  CHECK(slow.coefficient.imag() == Approx(-lambda * nu).epsilon(1e-10));
  CHECK(sum->error < 1e-4);
}

// C(t) of correlation.h, which tests/physics/bath holds to Boost quadrature; Matsubara rates and coefficients
// c_0 = lambda nu [cot(nu/2 theta) - i]: J. Chem. Phys. 130, 234111 (2009).
TEST_CASE("Pade sums of a Drude bath converge to its correlation function") {
  const double nu = 8.0, theta = 1.5, eta = 0.01;
  const ThermalBath bath = bath_of({Drude{eta, nu}}, theta);
  double before = 1.0;
  for (const int count : {2, 4, 8, 16}) {
    const auto sum = pade_sum(bath, count, 20.0);
    REQUIRE(sum.has_value());
    CHECK(sum->terms.size() == static_cast<std::size_t>(count) + 1);
    CHECK(sum->error < 0.5 * before);
    CHECK(std::abs(sum->rest) < 1e-13);  // gamma(0) is exact
    before = sum->error;
  }
  const auto sum = pade_sum(bath, 16, 20.0);
  CHECK(worst_c(bath, *sum, 0.05, 20.0) < 1e-5);
  const double lambda = M_PI * eta * nu / 2;
  const auto drude = std::find_if(sum->terms.begin(), sum->terms.end(), [&](const Exponential& e) { return std::abs(e.rate - nu) < 1e-9; });
  REQUIRE(drude != sum->terms.end());
  CHECK(std::abs(drude->coefficient - lambda * nu * Complex(1.0 / std::tan(nu / (2 * theta)), -1.0)) < 1e-9 * lambda * nu);
  check_partners(*sum);
}

TEST_CASE("an underdamped peak has a pair of conjugate rates") {
  const ThermalBath bath = bath_of({LorentzianPeak{0.3, 20.0, 0.5}, Drude{0.01, 8.0}}, 1.5);
  const auto sum = pade_sum(bath, 8, 50.0, 30.0);
  REQUIRE(sum.has_value());
  CHECK(sum->terms.size() == 11);
  check_partners(*sum);
  CHECK(worst_c(bath, *sum, 0.05, 50.0) < 1e-3);
  CHECK(sum->error < 1e-4);
}

// The limit nu = 2 pi theta, where the pole of J and a Matsubara pole coincide: C is continuous there.
TEST_CASE("a Drude rate on a Matsubara frequency") {
  const ThermalBath bath = bath_of({Drude{0.01, 2 * M_PI * 1.5}}, 1.5);
  const auto sum = exponential_sum(bath, 1e-4, 20.0, 30.0);
  REQUIRE(sum.has_value());
  CHECK(sum->error < 1e-4);
  CHECK(worst_c(bath, *sum, 0.1, 20.0) < 1e-4);
  check_partners(*sum);
}

// C(t) and gamma(0) of correlation.h and thermal_bath.h. The run is 5000 times the bath's shortest time.
TEST_CASE("fits of an ohmic bath get better with their length") {
  const ThermalBath bath = bath_of({PowerLaw{0.01, 50.0, 1.0}}, 1.5);
  const double c0 = std::abs(CorrelationFunction(bath).at(0.0));
  const std::map<int, double> reached = {{6, 1e-2}, {10, 4e-4}, {20, 4e-5}, {30, 3e-7}};
  for (const auto& [most, allowed] : reached) {
    const auto sum = fitted_sum(bath, most, 100.0);
    REQUIRE(sum.has_value());
    CAPTURE(most, sum->terms.size(), sum->error);
    CHECK(std::ssize(sum->terms) <= most);
    CHECK(worst_c(bath, *sum, 1e-5, 100.0) < allowed * c0);
    CHECK(half_range(*sum, 0.0).real() == Approx(0.5 * rate_of(bath, 0.0)).epsilon(1e-10));  // by the rest
    check_partners(*sum);
  }
}

// Kubo-Martin-Schwinger condition; J. Phys. Soc. Jpn 12, 570 (1957).
TEST_CASE("a sum obeys detailed balance and has the shift of its bath, to its error") {
  const std::vector<SpectralDensity> densities = {{Drude{0.01, 8.0}}, {PowerLaw{0.01, 50.0, 1.0}}, {PowerLaw{0.01, 10.0, 3.0}, Drude{0.01, 8.0}}};
  for (const SpectralDensity& density : densities) {
    const ThermalBath bath = bath_of(density, 1.5);
    const ShiftFunction shift(bath);
    const auto sum = exponential_sum(bath, 1e-4, 100.0, 20.0);
    REQUIRE(sum.has_value());
    CHECK(sum->error <= 1e-4);
    double largest = 0.0;
    for (double w = -20.0; w <= 20.0; w += 0.1) largest = std::max(largest, std::abs(Complex(0.5 * rate_of(bath, w), shift.at(w))));
    for (const double w : {0.03, 0.4, 1.7, 6.0, 19.0}) {
      CAPTURE(w, sum->error);
      const Complex down = half_range(*sum, w);
      const Complex up = half_range(*sum, -w);
      CHECK(std::abs(2.0 * up.real() - std::exp(-w / 1.5) * 2.0 * down.real()) < 6e-4 * largest);
      CHECK(std::abs(down.imag() - shift.at(w)) < 2e-4 * largest);
    }
  }
}

TEST_CASE("sums of other baths: cold, a table, none; refusals by name") {
  const auto cold = exponential_sum(bath_of({PowerLaw{0.01, 50.0, 1.0}}, 0.0), 1e-3, 100.0, 30.0);
  REQUIRE(cold.has_value());
  CHECK(cold->error <= 1e-3);
  // Kinks of J ring for long: what is reached is told, not asked.
  const ThermalBath table = bath_of({Tabulated{{0.0, 3.0, 5.0, 9.0, 20.0}, {0.0, 0.3, 1.0, 0.2, 0.0}}}, 1.5);
  const auto rows = fitted_sum(table, 30, 10.0);
  REQUIRE(rows.has_value());
  CHECK(rows->error < 0.1);
  CHECK(worst_c(table, *rows, 1e-3, 10.0) < 0.05 * std::abs(CorrelationFunction(table).at(0.0)));
  CHECK(exponential_sum(bath_of({}, 1.5), 1e-4, 10.0)->terms.empty());
  const auto refused = [](const tarn::Result<ExponentialSum, BathError>& sum) {
    REQUIRE_FALSE(sum.has_value());
    CHECK_FALSE(to_text(sum.error()).empty());
    return sum.error().parameter;
  };
  const ThermalBath drude = bath_of({Drude{0.01, 8.0}}, 1.5);
  CHECK(refused(pade_sum(drude, 0, 1.0)) == "number of terms");
  CHECK(refused(pade_sum(drude, 1, 0.0)) == "length of the run");
  CHECK(refused(pade_sum(drude, 1, 1.0, 0.0)) == "highest frequency of the sum");
  CHECK(refused(pade_sum(bath_of({Drude{0.01, 8.0}}, 0.0), 1, 1.0)) == "temperature");
  CHECK(refused(pade_sum(bath_of({PowerLaw{0.01, 8.0}}, 1.5), 1, 1.0)) == "density");
  CHECK(refused(exponential_sum(drude, 0.0, 1.0)) == "tolerance of the sum");
  CHECK(fitted_sum(bath_of({PowerLaw{0.01, 8.0, 0.5}}, 1.5), 5, 1.0).error().code == BathErrorCode::zero_rate_diverges);
}
