/// \file Baths against closed forms and identities known from outside. rad/ns, ns, hbar = 1.

#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/bath/bath_times.h"
#include "runtime/bath/correlation.h"
#include "runtime/bath/shift.h"
#include "runtime/bath/thermal_bath.h"

using namespace tarn::runtime;
using Eigen::ArrayXd;

namespace {

ThermalBath thermal(SpectralDensity density, double theta) {
  auto bath = ThermalBath::make(std::move(density), theta);
  REQUIRE(bath.has_value());
  return *bath;
}

const Tabulated kTable{{0.0, 3.0, 5.0, 9.0, 20.0}, {0.0, 0.3, 1.0, 0.2, 0.0}};
const Tabulated kLogTable{{1e-3, 0.1, 3.0, 30.0}, {1e-6, 1e-3, 0.02, 1e-9}, Interpolation::log_log};

double rate_at(const ThermalBath& bath, double w) { return bath.rate(ArrayXd::Constant(1, w))[0]; }

}  // namespace

// Kubo-Martin-Schwinger condition; J. Phys. Soc. Jpn 12, 570 (1957).
TEST_CASE("every thermal bath obeys detailed balance, tables included") {
  const SpectralDensity all = {PowerLaw{0.01, 50.0, 1.0}, PowerLaw{0.01, 5.0, 0.4}, Drude{0.1, 2.0}, LorentzianPeak{0.2, 6.0, 0.1}, kTable, kLogTable,
                               Sampled{[](std::span<const double> w, double* j) { for (std::size_t i = 0; i < w.size(); ++i) j[i] = w[i] / std::cosh(w[i]); }}};
  ArrayXd w(9);
  w << 1e-12, 1e-6, 0.01, 0.3, 1.0, 3.0, 5.5, 12.0, 29.0;
  for (const Component& component : all)
    for (const double theta : {0.02, 1.5, 30.0}) {
      const ThermalBath bath = thermal({component}, theta);
      const ArrayXd down = bath.rate(w);
      const ArrayXd up = bath.rate(-w);
      CAPTURE(component.index(), theta);
      CHECK((down >= 0.0).all());
      CHECK(((up - (-w / theta).exp() * down).abs() <= 4e-16 * up).all());
      // gamma(w) - gamma(-w) = 2 pi J(w): the commutator does not know the temperature.
      CHECK(((down - up - 2 * M_PI * bath.density(w)).abs() <= 1e-14 * down).all());
    }
}

TEST_CASE("gamma is continuous at zero frequency, 2 pi theta J'(0), and vanishes below it when cold") {
  const ThermalBath bath = thermal({PowerLaw{0.01, 50.0, 1.0}, Drude{0.02, 3.0}, LorentzianPeak{0.2, 6.0, 0.1}, kTable}, 1.5);
  const double slope = 0.01 + 0.02 + 2 / M_PI * 0.2 * 0.1 / 36.0 + 0.1;
  CHECK(bath.zero_rate().value() == Approx(2 * M_PI * 1.5 * slope).epsilon(1e-14));
  CHECK(rate_at(bath, 0.0) == bath.zero_rate().value());
  CHECK(rate_at(bath, 1e-12) == Approx(rate_at(bath, 0.0)).epsilon(1e-11));
  CHECK(rate_at(bath, -1e-12) == Approx(rate_at(bath, 0.0)).epsilon(1e-11));
  const ThermalBath cold = thermal(bath.components(), 0.0);
  CHECK(rate_at(cold, 0.0) == 0.0);
  CHECK(rate_at(cold, -1.0) == 0.0);
  CHECK(rate_at(cold, 2.0) == Approx(2 * M_PI * cold.density(ArrayXd::Constant(1, 2.0))[0]).epsilon(1e-15));
}

// Closed forms: integrals of |C| = eta/(1/wc^2 + t^2); tau_SB and tau_B as in Quantum 4, 227 (2020).
TEST_CASE("cold ohmic bath: both times in closed form") {
  const double eta = 0.01;
  const double wc = 50.0;
  const auto times = bath_times(thermal({PowerLaw{eta, wc, 1.0}}, 0.0), 100.0);
  REQUIRE(times.has_value());
  CHECK(times->tau_sb == Approx(2.0 / (M_PI * eta * wc)).epsilon(1e-10));
  CHECK(times->tau_b == Approx(std::log(1 + wc * wc * 1e4) / (M_PI * wc)).epsilon(1e-10));
  CHECK(times->tau_b == Approx(0.108444).epsilon(5e-6));
  CHECK(times->tau_sb_error < 1e-9 * times->tau_sb);
  CHECK(times->tau_b_error < 1e-9 * times->tau_b);
  const auto weaker = bath_times(thermal({PowerLaw{eta / 10, wc, 1.0}}, 0.0), 100.0);
  CHECK(weaker->tau_sb == Approx(10 * times->tau_sb).epsilon(1e-10));
  CHECK(weaker->tau_b == Approx(times->tau_b).epsilon(1e-10));
}

// Closed form: d tau_B/d ln T = tau_SB 2 eta kT/wc, from |C| -> 2 eta kT/(wc t^2).
TEST_CASE("warm ohmic bath: tau_B grows with the logarithm of the run") {
  const double eta = 0.01;
  const double wc = 50.0;
  const ThermalBath bath = thermal({PowerLaw{eta, wc, 1.0}}, 1.5);
  const auto shorter = bath_times(bath, 1e5);
  const auto longer = bath_times(bath, 1e6);
  REQUIRE(longer.has_value());
  CHECK(longer->tau_sb == Approx(shorter->tau_sb).epsilon(1e-10));
  const double slope = (longer->tau_b - shorter->tau_b) / std::log(10.0);
  CHECK(slope == Approx(longer->tau_sb * 2 * eta * 1.5 / wc).epsilon(1e-7));
}

// Closed form: C = c exp(-nu t) has tau_SB = nu/|c| and tau_B = 1/nu.
TEST_CASE("exponential correlation: both times in closed form") {
  const std::complex<double> c(0.3, -0.4);
  const double nu = 2.5;
  const auto times = bath_times([=](double t) { return c * std::exp(-nu * t); }, 1.0, 100.0);
  REQUIRE(times.has_value());
  CHECK(times->tau_sb == Approx(nu / 0.5).epsilon(1e-12));
  CHECK(times->tau_b == Approx(1 / nu).epsilon(1e-12));
  // A run shorter than the memory cuts the second integral.
  const auto cut = bath_times([=](double t) { return c * std::exp(-nu * t); }, 1.0, 0.3);
  CHECK(cut->tau_sb == Approx(nu / 0.5).epsilon(1e-12));
  CHECK(cut->tau_b == Approx((1 - std::exp(-nu * 0.3) * (1 + nu * 0.3)) / nu).epsilon(1e-12));
}

// A classical Drude bath (theta >> cutoff) is one exponential of rate cutoff: leading order in cutoff/theta.
TEST_CASE("hot Drude bath tends to the exponential") {
  const auto times = bath_times(thermal({Drude{0.01, 1e-3}}, 10.0), 1e6);
  REQUIRE(times.has_value());
  CHECK(times->tau_b == Approx(1e3).epsilon(2e-3));
  CHECK(times->tau_sb == Approx(1.0 / (M_PI * 0.01 * 10.0)).epsilon(2e-3));
}

TEST_CASE("times: hidden structure gives the same, divergences are refused by name") {
  const Sampled hidden{[](std::span<const double> w, double* j) { for (std::size_t i = 0; i < w.size(); ++i) j[i] = 0.01 * w[i] * std::exp(-w[i] / 50.0); }};
  for (const double theta : {0.0, 1.5}) {
    const auto closed = bath_times(thermal({PowerLaw{0.01, 50.0, 1.0}}, theta), 1e3);
    const auto open = bath_times(thermal({hidden}, theta), 1e3);
    REQUIRE(open.has_value());
    CHECK(open->tau_sb == Approx(closed->tau_sb).epsilon(1e-7));
    CHECK(open->tau_b == Approx(closed->tau_b).epsilon(1e-7));
  }
  const auto sub_ohmic = bath_times(thermal({Drude{0.1, 1.0}, PowerLaw{0.01, 50.0, 0.5}}, 1.5), 1e3);
  REQUIRE_FALSE(sub_ohmic.has_value());
  CHECK(sub_ohmic.error().code == BathErrorCode::zero_rate_diverges);
  CHECK(sub_ohmic.error().component == 1);
  Sampled band = hidden;
  band.low = 0.5;
  band.high = 20.0;
  const auto edges = bath_times(thermal({Drude{0.1, 1.0}, band}, 1.5), 1e3);
  REQUIRE_FALSE(edges.has_value());
  CHECK(edges.error().code == BathErrorCode::times_diverge);
  CHECK(edges.error().component == 1);
  CHECK_FALSE(bath_times(thermal({hidden}, 1.5), 0.0).has_value());
  CHECK(std::isinf(bath_times(thermal({}, 1.5), 1.0)->tau_sb));
}

// Closed form with the trigamma function, DLMF 5.15.
TEST_CASE("ohmic C(0) has its value") {
  const CorrelationFunction c(thermal({PowerLaw{0.01, 50.0, 1.0}}, 1.5));
  CHECK(c.at(0.0).real() == Approx(25.0709031).epsilon(2e-9));
  CHECK(c.at(0.0).imag() == 0.0);
}

// Closed form; DLMF 6.2 for Ei, by the standard library's own expint.
TEST_CASE("cold ohmic shift") {
  const ShiftFunction shift(thermal({PowerLaw{0.01, 50.0, 1.0}}, 0.0));
  for (const double w : {-200.0, -3.0, -1e-4, 1e-4, 2.0, 50.0, 400.0}) {
    CAPTURE(w);
    CHECK(shift.at(w) == Approx(0.01 * (-50.0 + w * std::exp(-w / 50.0) * std::expint(w / 50.0))).epsilon(1e-12));
  }
  CHECK(std::isfinite(shift.at(1e6)));
}

// Rev. Mod. Phys. 59, 1 (1987): the shift of the splitting D at zero bias, A = sigma_z, is
// S(D) - S(-D) -> alpha D [ln(D/wc) + gamma_E] with alpha = 2 eta: first order of the renormalised D.
TEST_CASE("cold ohmic shift renormalises the tunnelling amplitude") {
  const double alpha = 1e-3;
  const double wc = 1e4;
  const ShiftFunction shift(thermal({PowerLaw{alpha / 2, wc, 1.0}}, 0.0));
  const double expected = alpha * (std::log(1.0 / wc) + 0.57721566490153286);
  CHECK(shift.at(1.0) - shift.at(-1.0) == Approx(expected).epsilon(1e-6));
}

// Quantum Dissipative Systems (World Scientific): 1/T1 = pi alpha (D^2/Om) coth(Om/2kT) exp(-Om/wc),
// 1/Tphi = 2 pi alpha kT eps^2/Om^2, H = -D/2 sx - eps/2 sz, A = sz.
TEST_CASE("the rates are those of the weakly damped two-level system") {
  const double alpha = 2e-3, wc = 40.0, kt = 1.1, d = 2.0, eps = 1.3;
  const double om = std::hypot(d, eps);
  const ThermalBath bath = thermal({PowerLaw{alpha / 2, wc, 1.0}}, kt);
  const double relax = d * d / (om * om) * (rate_at(bath, om) + rate_at(bath, -om));
  CHECK(relax == Approx(M_PI * alpha * d * d / om / std::tanh(om / (2 * kt)) * std::exp(-om / wc)).epsilon(1e-13));
  const double dephase = 2 * eps * eps / (om * om) * rate_at(bath, 0.0);
  CHECK(dephase == Approx(2 * M_PI * alpha * kt * eps * eps / (om * om)).epsilon(1e-13));
}

// lambda = int J/w: elementary integrals of the formulas (DLMF 5.2.1 for the power law).
TEST_CASE("reorganisation energies") {
  CHECK(thermal({PowerLaw{0.01, 50.0, 2.5}}, 1.0).reorganisation() == Approx(0.5 * std::tgamma(2.5)).epsilon(1e-14));
  CHECK(thermal({Drude{0.01, 50.0}}, 1.0).reorganisation() == Approx(M_PI * 0.25).epsilon(1e-14));
  CHECK(thermal({LorentzianPeak{0.3, 6.0, 0.2}}, 1.0).reorganisation() == Approx(0.3).epsilon(1e-14));
  // Straight segments: int (a + b w)/w = a log(w1/w0) + b (w1 - w0).
  double exact = 0.0;
  for (std::size_t i = 0; i + 1 < kTable.w.size(); ++i) {
    const double slope = (kTable.j[i + 1] - kTable.j[i]) / (kTable.w[i + 1] - kTable.w[i]);
    const double offset = kTable.j[i] - slope * kTable.w[i];
    exact += slope * (kTable.w[i + 1] - kTable.w[i]) + (offset == 0.0 ? 0.0 : offset * std::log(kTable.w[i + 1] / kTable.w[i]));
  }
  for (const double theta : {0.0, 0.3, 20.0}) {
    CHECK(thermal({kTable}, theta).reorganisation() == Approx(exact).epsilon(1e-12));
    CHECK(ShiftFunction(thermal({kTable}, theta)).at(0.0) == Approx(-exact).epsilon(1e-12));
  }
}
