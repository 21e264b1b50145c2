/// \file Special functions against Arb (ball arithmetic, 128 bits) and printed values.

#include "runtime/bath/special_functions.h"

#include <acb.h>
#include <acb_hypgeom.h>

#include <catch2/catch.hpp>
#include <complex>
#include <functional>
#include <random>

using namespace tarn::runtime;
using Complex = std::complex<double>;

namespace {

constexpr slong kBits = 128;

class Ball {
 public:
  Ball() { acb_init(value_); }
  explicit Ball(Complex z) : Ball() { acb_set_d_d(value_, z.real(), z.imag()); }
  ~Ball() { acb_clear(value_); }
  Ball(const Ball&) = delete;
  Ball& operator=(const Ball&) = delete;
  acb_ptr get() { return value_; }
  Complex middle() {
    return {arf_get_d(arb_midref(acb_realref(value_)), ARF_RND_NEAR), arf_get_d(arb_midref(acb_imagref(value_)), ARF_RND_NEAR)};
  }
  double relative_bits() { return static_cast<double>(acb_rel_accuracy_bits(value_)); }

 private:
  acb_t value_;
};

using Reference = std::function<void(acb_ptr, acb_ptr)>;

Complex reference(const Reference& f, Complex z) {
  Ball in(z);
  Ball out;
  f(out.get(), in.get());
  REQUIRE(out.relative_bits() > 60.0);
  return out.middle();
}

/// 400 points of |z| from 1e-3 to 1e3 with |arg z| up to `angle`; the real axis included.
std::vector<Complex> points(double angle) {
  std::mt19937 engine(7);
  std::uniform_real_distribution<double> unit(-1.0, 1.0);
  std::vector<Complex> z;
  for (int k = 0; k < 400; ++k) {
    const double modulus = std::pow(10.0, 3.0 * unit(engine));
    z.push_back(k % 8 == 0 ? Complex(modulus) : std::polar(modulus, angle * unit(engine)));
  }
  return z;
}

double worst(const std::function<Complex(Complex)>& ours, const Reference& arb, const std::vector<Complex>& where) {
  double error = 0.0;
  for (const Complex z : where) {
    const Complex exact = reference(arb, z);
    const double here = std::abs(ours(z) - exact) / std::max(1.0, std::abs(exact));
    if (here > 1e-13) WARN("z = " << z << " error " << here);
    error = std::max(error, here);
  }
  return error;
}

constexpr double kWide = 0.75 * 3.14159265358979;

}  // namespace

// Reference: Arb 2.23 (flint-arb), acb_lgamma, acb_digamma.
TEST_CASE("log gamma and digamma agree with Arb") {
  CHECK(worst(log_gamma, [](acb_ptr y, acb_ptr z) { acb_lgamma(y, z, kBits); }, points(kWide)) < 1e-13);
  CHECK(worst(digamma, [](acb_ptr y, acb_ptr z) { acb_digamma(y, z, kBits); }, points(3.0)) < 1e-13);
}

// Reference: Arb 2.23, acb_polygamma and acb_hurwitz_zeta.
TEST_CASE("trigamma and Hurwitz zeta agree with Arb") {
  CHECK(worst(trigamma, [](acb_ptr y, acb_ptr z) { Ball one(1.0); acb_polygamma(y, one.get(), z, kBits); }, points(kWide)) < 1e-13);
  for (const double s : {1.1, 1.5, 2.0, 2.7, 4.0, 9.0}) {
    CAPTURE(s);
    const Reference zeta = [s](acb_ptr y, acb_ptr z) { Ball order(s); acb_hurwitz_zeta(y, order.get(), z, kBits); };
    CHECK(worst([s](Complex z) { return hurwitz_zeta(s, z); }, zeta, points(kWide)) < 1e-13);
  }
}

// Reference: Arb 2.23, acb_hypgeom_expint; Ei(x) = -E1(-x), its real part for x > 0 (DLMF 6.5).
TEST_CASE("exponential integrals agree with Arb") {
  const Reference e1 = [](acb_ptr y, acb_ptr z) {
    Ball one(1.0);
    Ball growth;
    acb_hypgeom_expint(y, one.get(), z, 32 * kBits);
    acb_exp(growth.get(), z, 32 * kBits);
    acb_mul(y, y, growth.get(), kBits);
  };
  CHECK(worst(exp_integral_e1_scaled, e1, points(3.14)) < 1e-13);
  const auto ei = [](Complex x) { return Complex(exp_integral_ei_scaled(-x.real())); };
  const Reference minus_real_e1 = [e1](acb_ptr y, acb_ptr x) {
    e1(y, x);
    arb_zero(acb_imagref(y));
    acb_neg(y, y);
  };
  std::vector<Complex> real = points(0.0);
  for (const Complex x : points(0.0)) real.push_back(-x.real());
  CHECK(worst(ei, minus_real_e1, real) < 1e-13);
}

// Reference: Arb 2.23, acb_hypgeom_2f1: the sum is exp(-x)/(1+v) F(1, 1+v; 2+v; exp(-x)).
TEST_CASE("the Lerch sum agrees with Arb's hypergeometric function") {
  for (const double x : {1e-6, 1e-3, 0.03, 0.3, 0.79, 0.81, 3.0, 30.0})
    for (const Complex v : {Complex(0.3), Complex(-0.4), Complex(-7.3), Complex(-61.2), Complex(15.0), Complex(-3.2, 4.0), Complex(40.0, -70.0)}) {
      CAPTURE(x, v);
      const Complex exact = reference([x](acb_ptr y, acb_ptr u) {
        Ball one(1.0);
        Ball b;
        Ball c;
        Ball z(x);
        acb_add_ui(b.get(), u, 1, kBits);
        acb_add_ui(c.get(), u, 2, kBits);
        acb_neg(z.get(), z.get());
        acb_exp(z.get(), z.get(), 4 * kBits);
        acb_hypgeom_2f1(y, one.get(), b.get(), c.get(), z.get(), 0, 4 * kBits);
        acb_mul(y, y, z.get(), kBits);
        acb_div(y, y, b.get(), kBits);
      }, v);
      CHECK(std::abs(lerch_sum(x, v) - exact) < 1e-13 * std::max(1.0, std::abs(exact)));
    }
}

// NIST DLMF: 5.4.12 psi(1) = -Euler's constant; 5.4.14 with psi'(1) = pi^2/6 (25.6.1);
// 25.6.1 zeta(4) = pi^4/90; 25.11.11 zeta(s, 1/2) = (2^s - 1) zeta(s); 5.4.6 Gamma(1/2)^2 = pi.
// E1(1) = 0.219383934395520 (table 6.1 of the older handbook, 5.1).
TEST_CASE("special functions have their tabulated values") {
  const double pi = 3.14159265358979323846;
  CHECK(digamma(1.0).real() == Approx(-0.57721566490153286).epsilon(1e-14));
  CHECK(trigamma(1.0).real() == Approx(pi * pi / 6).epsilon(1e-14));
  CHECK(hurwitz_zeta(4.0, 1.0).real() == Approx(std::pow(pi, 4) / 90).epsilon(1e-14));
  CHECK(hurwitz_zeta(1.5, 0.5).real() == Approx((std::pow(2.0, 1.5) - 1) * 2.6123753486854883).epsilon(1e-13));
  CHECK(log_gamma(0.5).real() == Approx(0.5 * std::log(pi)).epsilon(1e-14));
  CHECK(exp_integral_e1_scaled(1.0).real() == Approx(0.219383934395520274 * std::exp(1.0)).epsilon(1e-14));
}
