/// \file c(w, w') and S(w, w') of the coarse-grained and the universal equation against brute integrals by
/// Boost.Math 1.74 (adaptive Gauss-Kronrod) and against identities.

#include "runtime/bath/pair_function.h"

#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/bath/correlation.h"
#include "runtime/bath/shift.h"

using namespace tarn::runtime;
using Eigen::ArrayXd;
using Complex = std::complex<double>;

namespace {

ThermalBath pair_bath(SpectralDensity density, double theta) {
  auto bath = ThermalBath::make(std::move(density), theta);
  REQUIRE(bath.has_value());
  return *bath;
}

const Tabulated kPairRows{{0.0, 3.0, 5.0, 9.0, 20.0}, {0.0, 0.3, 1.0, 0.2, 0.0}};

double pair_rate(const ThermalBath& bath, double w) { return bath.rate(ArrayXd::Constant(1, w))[0]; }

template <class F>
double kronrod(F&& f, double a, double b, unsigned depth = 3) {
  return boost::math::quadrature::gauss_kronrod<double, 31>::integrate(f, a, b, depth, 1e-10);
}

/// G by the integral over x that defines it.
Complex averaged_by_quadrature(const ThermalBath& bath, double window, double w, double other) {
  const CorrelationFunction c(bath);
  const double d = other - w;
  const auto value = [&](double x) {
    const double kernel = d == 0.0 ? window - x : 2.0 * std::sin(0.5 * d * (window - x)) / d;
    return c.at(x) * std::polar(kernel / window, 0.5 * (w + other) * x);
  };
  Complex sum = 0.0;
  for (double b = window; b > 1e-13 * window; b *= 0.5)
    sum += Complex(kronrod([&](double x) { return value(x).real(); }, 0.5 * b, b), kronrod([&](double x) { return value(x).imag(); }, 0.5 * b, b));
  return sum;
}

/// f by the integral that defines it, the pole taken off by pairing +x with -x, cut at all kinks.
double root_by_quadrature(const ThermalBath& bath, double a, double b, std::vector<double> kinks, double far) {
  const auto g = [&](double y) { return std::sqrt(pair_rate(bath, y)); };
  std::vector<double> edges;
  for (double x = far; x > 1e-11; x *= 0.5) edges.push_back(x);
  for (const double k : kinks)
    for (const double w : {a, b}) edges.push_back(std::abs(k - w));
  std::erase_if(edges, [](double x) { return x < 1e-12; });
  std::sort(edges.begin(), edges.end());
  double sum = 0.0;
  for (std::size_t i = 0; i + 1 < edges.size(); ++i)
    if (edges[i + 1] > edges[i])
      sum += kronrod([&](double x) { return (g(a + x) * g(b + x) - g(a - x) * g(b - x)) / x; }, edges[i], edges[i + 1]);
  return -sum / (2 * M_PI);
}

struct AveragedCase {
  SpectralDensity density;
  double theta;
};
const std::vector<AveragedCase>& averaged_cases() {
  static const std::vector<AveragedCase> kCases = {
      {{PowerLaw{0.001, 50.0, 1.0}}, 1.5}, {{PowerLaw{0.001, 50.0, 1.0}}, 0.0}, {{Drude{0.01, 8.0}}, 1.5}, {{Drude{0.01, 8.0}}, 0.0},
      {{LorentzianPeak{0.3, 20.0, 0.5}}, 1.5}, {{kPairRows}, 1.5}, {{kPairRows}, 0.0}, {{PowerLaw{0.001, 50.0, 1.0}, LorentzianPeak{0.1, 6.0, 0.2}}, 1.5}};
  return kCases;
}

}  // namespace

// Phys. Rev. A 88, 012103 (2013): the integral over x, by Boost.
TEST_CASE("coarse-grained: c and S are the parts of G") {
  for (const auto& [density, theta] : averaged_cases()) {
    const ThermalBath bath = pair_bath(density, theta);
    const double lambda = bath.reorganisation();
    const PairFunctions pair = averaged_pair(bath, 2.0, 60.0);
    CAPTURE(density[0].index(), density.size(), theta, pair.rate.error() / lambda, pair.shift.error() / lambda);
    CHECK(pair.rate.error() < 1e-9 * lambda);
    CHECK(pair.shift.error() < 1e-9 * lambda);
    CHECK(pair.rate.values().minCoeff() > 0.0);
    for (const auto& [w, other] : {std::pair(0.0, 0.0), {-60.0, 60.0}, {2.0, 2.001}, {-4.0, 17.3}}) {
      const Complex g = averaged_by_quadrature(bath, 2.0, w, other);
      CAPTURE(w, other);
      CHECK(std::abs(pair.rate(w, other) - 2.0 * g.real()) < 1e-8 * lambda);
      CHECK(std::abs(pair.shift(w, other) - g.imag()) < 1e-8 * lambda);
      CHECK(pair.rate(w, other) == Approx(pair.rate(other, w)).margin(1e-12 * lambda));
    }
  }
}

// Phys. Rev. A 78, 022106 (2008): iint over the square of C(t1 - t2) with phases; the shift has sgn(t1 - t2)/2i. Midpoint
// rule of 400 x 400 points on a smooth C (super-ohmic), Richardson with 200 x 200.
TEST_CASE("coarse-grained: the double integral over the window") {
  const ThermalBath bath = pair_bath({PowerLaw{0.01, 3.0, 3.0}}, 1.0);
  const double window = 1.5, w = 2.0, other = -1.3;
  const CorrelationFunction c(bath);
  const auto brute = [&](int count) {
    // By differences t1 - t2 and their mean: c = (1/Ta) iint exp(i w t1 - i w' t2) C(t1 - t2).
    const double h = window / count;
    std::vector<Complex> at(static_cast<std::size_t>(count));
    for (int k = 0; k < count; ++k) at[static_cast<std::size_t>(k)] = c.at(k * h);
    Complex rate = 0.0, shift = 0.0;
    for (int i = 0; i < count; ++i)
      for (int j = 0; j < count; ++j) {
        const double t1 = (i + 0.5) * h - 0.5 * window, t2 = (j + 0.5) * h - 0.5 * window;
        const Complex value = i >= j ? at[static_cast<std::size_t>(i - j)] : std::conj(at[static_cast<std::size_t>(j - i)]);
        const Complex term = h * h / window * value * std::polar(1.0, w * t1 - other * t2);
        rate += term;
        shift += Complex(0.0, -0.5) * (i == j ? 0.0 : i > j ? 1.0 : -1.0) * term;
      }
    return std::pair(rate, shift);
  };
  const auto [rate, shift] = brute(400);
  const auto [rate2, shift2] = brute(200);
  const PairFunctions pair = averaged_pair(bath, window, 5.0);
  const Complex c_brute = rate + (rate - rate2) / 3.0;
  const Complex s_brute = shift + (shift - shift2) / 3.0;
  const double lambda = bath.reorganisation();
  CHECK(std::abs(c_brute - pair.rate(w, other)) < 1e-6 * lambda);
  CHECK(std::abs(s_brute - pair.shift(w, other)) < 1e-6 * lambda);
}

// Phys. Rev. A 88, 012103 (2013): c(w, w') = (Ta/2 pi) int dv gamma(v) sinc[(w - v)Ta/2] sinc[(w' - v)Ta/2].
TEST_CASE("coarse-grained: the form with sinc") {
  const ThermalBath bath = pair_bath({PowerLaw{0.001, 5.0, 1.0}}, 1.5);
  const double window = 2.0;
  const PairFunctions pair = averaged_pair(bath, window, 20.0);
  const auto sinc = [](double x) { return std::abs(x) < 1e-8 ? 1.0 : std::sin(x) / x; };
  for (const auto& [w, other] : {std::pair(1.0, 1.0), {2.0, -3.0}, {0.4, 5.0}}) {
    double sum = 0.0;
    for (double v = -60.0; v < 240.0; v += 1.0)
      sum += kronrod([&](double x) { return pair_rate(bath, x) * sinc(0.5 * window * (w - x)) * sinc(0.5 * window * (other - x)); }, v, v + 1.0);
    CHECK(pair.rate(w, other) == Approx(sum * window / (2 * M_PI)).epsilon(1e-9));
  }
}

// Phys. Rev. A 88, 012103 (2013): Davies is the limit, the difference falls as 1/Ta, as do the terms off the diagonal.
TEST_CASE("coarse-grained: a long window gives gamma and S") {
  const ThermalBath bath = pair_bath({Drude{0.01, 8.0}}, 1.5);
  const double w = 2.0;
  const double exact_rate = pair_rate(bath, w), exact_shift = ShiftFunction(bath).at(w);
  const PairFunctions shorter = averaged_pair(bath, 20.0, 6.0);
  const PairFunctions longer = averaged_pair(bath, 40.0, 6.0);
  CHECK((shorter.rate(w, w) - exact_rate) / (longer.rate(w, w) - exact_rate) == Approx(2.0).epsilon(1e-6));
  CHECK((shorter.shift(w, w) - exact_shift) / (longer.shift(w, w) - exact_shift) == Approx(2.0).epsilon(1e-6));
  CHECK(std::abs(longer.rate(w, -w)) < 4.0 * exact_rate / (2 * w * 40.0));
}

TEST_CASE("universal: c is exact and S(w, w) is the shift") {
  struct Case {
    SpectralDensity density;
    double w_max;
    double allowed;  // of lambda
  };
  const Case cases[] = {{{PowerLaw{0.001, 50.0, 1.0}}, 40.0, 1e-8}, {{Drude{0.01, 8.0}}, 40.0, 1e-9},
                        {{LorentzianPeak{0.3, 6.0, 4.0}}, 12.0, 1e-7}, {{kPairRows}, 12.0, 1e-3}};
  for (const auto& [density, w_max, allowed] : cases) {
    const ThermalBath bath = pair_bath(density, 1.5);
    const double lambda = bath.reorganisation();
    const PairFunctions pair = root_pair(bath, w_max);
    CAPTURE(density[0].index(), pair.shift.error() / lambda, pair.shift.rank());
    CHECK(pair.rate.rank() == 1);
    CHECK(pair.rate.values()[0] == 1.0);
    CHECK(pair.rate.error() == 0.0);
    CHECK(pair.shift.error() < allowed * lambda);
    const ShiftFunction shift(bath);
    for (const double u : {-0.93, -0.4, -0.01, 1e-4, 0.02, 0.31, 0.77, 1.0}) {
      const double w = u * w_max;
      CAPTURE(w);
      CHECK(pair.rate(w, 2.0) == Approx(std::sqrt(pair_rate(bath, w) * pair_rate(bath, 2.0))).epsilon(1e-13));
      CHECK(std::abs(pair.shift(w, w) - shift.at(w)) < std::max(4.0 * pair.shift.error(), 1e-10 * lambda));
    }
  }
}

// Phys. Rev. B 102, 115109 (2020): the principal value, by Boost.
TEST_CASE("universal: S is the principal value of its definition") {
  struct Case {
    SpectralDensity density;
    double far, allowed;
  };
  // The Drude tail beyond `far` is below 1e-9.
  const Case cases[] = {{{PowerLaw{0.001, 10.0, 1.0}}, 600.0, 3e-8}, {{Drude{0.01, 8.0}}, 1e12, 1e-8}};
  for (const auto& [density, far, allowed] : cases) {
    const ThermalBath bath = pair_bath(density, 1.5);
    const PairFunctions pair = root_pair(bath, 20.0);
    for (const auto& [a, b] : {std::pair(1.0, 4.0), {-3.0, 7.0}, {2.0, 2.1}}) {
      CAPTURE(density[0].index(), a, b);
      CHECK(std::abs(pair.shift(a, b) - root_by_quadrature(bath, a, b, {0.0}, far)) < allowed * bath.reorganisation());
      CHECK(pair.shift(a, b) == Approx(pair.shift(b, a)).margin(1e-12));
    }
  }
}

TEST_CASE("factors come for many frequencies; no bath has rank zero") {
  const ThermalBath bath = pair_bath({Drude{0.01, 8.0}}, 1.5);
  const PairFunctions pair = averaged_pair(bath, 1.0, 30.0);
  std::vector<double> w;
  for (int i = 0; i <= 36; ++i) w.push_back(-30.0 + 60.0 * i / 36);
  const Eigen::MatrixXd u = pair.shift.factors(w);
  REQUIRE(u.rows() == 37);
  REQUIRE(u.cols() == pair.shift.rank());
  for (int i = 0; i < 37; i += 5)
    for (int j = 0; j < 37; j += 7)
      CHECK((u.row(i).array() * u.row(j).array() * pair.shift.values().transpose().array()).sum() == Approx(pair.shift(w[static_cast<std::size_t>(i)], w[static_cast<std::size_t>(j)])).epsilon(1e-12).margin(1e-15));
  const ThermalBath none = pair_bath({}, 1.5);
  CHECK(averaged_pair(none, 1.0, 30.0).rate.rank() == 0);
  CHECK(root_pair(none, 30.0).shift.factors(w).cols() == 0);
}
