#include "runtime/bath/special_functions.h"

#include <array>
#include <boost/math/special_functions/expint.hpp>
#include <cmath>
#include <limits>
#include <numbers>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// B_2j / (2j)! for j = 1, 2, ... (DLMF 24.2).
constexpr std::array kBernoulli = {
    1.0 / 12,
    -1.0 / 720,
    1.0 / 30240,
    -1.0 / 1209600,
    1.0 / 47900160,
    -691.0 / 1307674368000.0,
    1.0 / 74724249600.0,
    -3617.0 / 10670622842880000.0,
    43867.0 / 5109094217170944000.0,
    -174611.0 / 802857662698291200000.0,
};

/// The asymptotic series is used where |z| cos(arg z / 2) is at least this; its
/// remainder is then below rounding for all functions here.
constexpr double kFar = 12.0;

bool is_far(Complex z) {
  const double modulus = std::abs(z);
  return modulus * (modulus + z.real()) >= 2.0 * kFar * kFar;
}

Complex inverse_power(Complex z, double s) {
  constexpr double kLargestProduct = 8.0;
  if (s != std::floor(s) || s > kLargestProduct) return std::exp(-s * std::log(z));
  Complex product = z;
  for (int k = 1; k < static_cast<int>(s); ++k) product *= z;
  return 1.0 / product;
}

/// E1(z) by its power series, without the factor exp(z).
Complex e1_series(Complex z) {
  Complex term = 1.0;
  Complex sum = -std::numbers::egamma - std::log(z);
  for (int k = 1; k < 400; ++k) {
    term *= -z / static_cast<double>(k);
    const Complex addend = term / static_cast<double>(k);
    sum -= addend;
    if (std::abs(addend) < 1e-17 * std::abs(sum)) break;
  }
  return sum;
}

/// exp(z) E1(z) by the continued fraction 1/(z+1-1/(z+3-4/(z+5-...))).
Complex e1_fraction(Complex z) {
  Complex b = z + 1.0;
  Complex c = 1e300;
  Complex d = 1.0 / b;
  Complex h = d;
  for (int k = 1; k < 4000; ++k) {
    const double a = -static_cast<double>(k) * k;
    b += 2.0;
    d = 1.0 / (a * d + b);
    c = b + a / c;
    const Complex factor = c * d;
    h *= factor;
    if (std::abs(factor - 1.0) < 2e-16) break;
  }
  return h;
}

Complex e1_asymptotic(Complex z) {
  Complex term = 1.0 / z;
  Complex sum = term;
  for (int k = 1; k < 60; ++k) {
    const Complex next = term * (-static_cast<double>(k) / z);
    if (std::abs(next) >= std::abs(term) || std::abs(next) < 1e-18 * std::abs(sum)) break;
    term = next;
    sum += term;
  }
  return sum;
}

/// Sum over k >= n of exp(-k x)/(k + v), Euler-Maclaurin, for |n + v| >= kFar.
Complex lerch_tail(double x, Complex v, double n) {
  const Complex w = n + v;
  const double decay = std::exp(-n * x);
  Complex sum = decay * exp_integral_e1_scaled(w * x);
  Complex derivative = decay / w;  // of exp(-k x)/(k + v) at k = n, of order m
  sum += 0.5 * derivative;
  double power = decay;  // (-x)^m exp(-n x)
  int m = 0;
  for (const double bernoulli : kBernoulli) {
    do {
      ++m;
      power *= -x;
      derivative = (power - static_cast<double>(m) * derivative) / w;
    } while (m % 2 == 0);
    sum -= bernoulli * derivative;
  }
  return sum;
}

}  // namespace

Complex log_gamma(Complex z) {
  Complex shift = 0.0;
  for (; !is_far(z); z += 1.0) shift += std::log(z);
  const Complex inverse = 1.0 / z;
  const Complex inverse2 = inverse * inverse;
  Complex power = inverse;
  double factorial = 1.0;  // (2j-2)!
  Complex series = 0.0;
  for (std::size_t j = 0; j < kBernoulli.size(); ++j) {
    series += kBernoulli[j] * factorial * power;
    power *= inverse2;
    const double n = 2.0 * static_cast<double>(j);
    factorial *= (n + 1.0) * (n + 2.0);
  }
  constexpr double kHalfLogTwoPi = 0.91893853320467274178;
  return (z - 0.5) * std::log(z) - z + kHalfLogTwoPi + series - shift;
}

Complex digamma(Complex z) {
  if (z.real() < 0.0) {
    const Complex reduced = z - std::round(z.real());
    return digamma(1.0 - z) - std::numbers::pi / std::tan(std::numbers::pi * reduced);
  }
  Complex shift = 0.0;
  for (; !is_far(z); z += 1.0) shift += 1.0 / z;
  const Complex inverse2 = 1.0 / (z * z);
  Complex power = inverse2;
  double factorial = 1.0;  // (2j-1)!
  Complex series = 0.0;
  for (std::size_t j = 0; j < kBernoulli.size(); ++j) {
    series += kBernoulli[j] * factorial * power;
    power *= inverse2;
    const double n = 2.0 * static_cast<double>(j) + 2.0;
    factorial *= n * (n + 1.0);
  }
  return std::log(z) - 0.5 / z - series - shift;
}

Complex trigamma(Complex z) { return hurwitz_zeta(2.0, z); }

Complex hurwitz_zeta(double s, Complex z) {
  TARN_CHECK(s > 1.0);
  Complex sum = 0.0;
  for (; !is_far(z); z += 1.0) sum += inverse_power(z, s);
  const Complex last = inverse_power(z, s);
  sum += last * (z / (s - 1.0) + 0.5);
  const Complex inverse = 1.0 / z;
  const Complex inverse2 = inverse * inverse;
  Complex power = last * inverse * s;  // (s)_(2j-1) z^(-s-2j+1)
  for (std::size_t j = 0; j < kBernoulli.size(); ++j) {
    sum += kBernoulli[j] * power;
    const double n = s + 2.0 * static_cast<double>(j) + 1.0;
    power *= n * (n + 1.0) * inverse2;
  }
  return sum;
}

double exp_integral_ei_scaled(double x) {
  constexpr double kAsymptotic = 500.0;
  if (std::abs(x) > kAsymptotic) return -e1_asymptotic(-x).real();
  return std::exp(-x) * boost::math::expint(x);
}

Complex exp_integral_e1_scaled(Complex z) {
  // A negative zero would pick the lower side of the cut.
  if (z.imag() == 0.0) z = Complex(z.real(), 0.0);
  const double modulus = std::abs(z);
  if (modulus + z.real() < 4.0 && modulus < 45.0) return std::exp(z) * e1_series(z);
  if (modulus > 45.0 && modulus + z.real() < 4.0) {
    // Next to the cut the asymptotic series misses the small jump +-i pi exp(z).
    const double side = z.imag() >= 0.0 ? -1.0 : 1.0;
    return e1_asymptotic(z) + Complex(0.0, side * std::numbers::pi) * std::exp(z);
  }
  return modulus > 45.0 ? e1_asymptotic(z) : e1_fraction(z);
}

Complex lerch_sum(double x, Complex v) {
  if (x == 0.0) return -digamma(1.0 + v);
  constexpr double kDirect = 0.8;
  const bool direct = x > kDirect;
  const double n = direct ? std::ceil(45.0 / x) + 1.0 : std::max(1.0, std::ceil(kFar - v.real()));
  const double ratio = std::exp(-x);
  Complex sum = 0.0;
  double weight = ratio;
  for (double k = 1.0; k < n; k += 1.0, weight *= ratio) sum += weight / (k + v);
  return direct ? sum : sum + lerch_tail(x, v, n);
}

}  // namespace tarn::runtime
