#include <catch2/catch.hpp>
#include <cmath>
#include <complex>
#include <random>

#include "runtime/integrate/chebyshev.h"
#include "runtime/integrate/comoving.h"
#include "runtime/integrate/dense_exponential.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using tarn::test::exponential_of;
using Complex = std::complex<double>;
using Matrix = Eigen::MatrixXcd;
using Vector = Eigen::VectorXcd;

namespace {

Matrix random_hermitian(Eigen::Index n, unsigned seed) {
  std::mt19937 random(seed);
  std::normal_distribution<double> number;
  Matrix a(n, n);
  for (Complex& x : a.reshaped()) x = {number(random), number(random)};
  return (a + a.adjoint()) / 2;
}

Product product_of(const Matrix& g) {
  return [&g](const double* x, double* y) {
    Eigen::Map<Vector>(reinterpret_cast<Complex*>(y), g.rows()) =
        g * Eigen::Map<const Vector>(reinterpret_cast<const Complex*>(x), g.rows());
  };
}

/// exp(h G) x by the Chebyshev series, from an interval found or given.
Vector series(const Matrix& g, double h, double tolerance, const Vector& x, Counters& counters,
              std::optional<Interval> start = {}) {
  const auto size = static_cast<std::size_t>(2 * g.rows());
  Interval interval = start ? *start : estimate_spectrum(product_of(g), size, 12, counters);
  AlignedArray y(size);
  Eigen::Map<Vector> view(reinterpret_cast<Complex*>(y.data()), g.rows());
  view = x;
  ChebyshevExponential exponential(size);
  REQUIRE(!exponential.advance(product_of(g), h, tolerance, interval, y.data(), counters, {}));
  return view;
}

}  // namespace

// Reference: Eigen 3.4's matrix exponential.
TEST_CASE("the Chebyshev series meets its tolerance") {
  const Matrix h = random_hermitian(40, 3) + 5 * Matrix::Identity(40, 40);
  const Matrix g = Complex(0, -1) * h;
  const Vector x = Vector::Ones(40) / std::sqrt(40.0);
  for (const double t : {0.01, 0.7, 6.0, 40.0}) {
    const Vector expected = exponential_of(t * g) * x;
    for (const double tolerance : {1e-5, 1e-8, 1e-12}) {
      Counters counters;
      CHECK((series(g, t, tolerance, x, counters) - expected).norm() < tolerance + 2e-12);
      // About one product for each radian of the half-width (here 12.6 rad/ns), and a few more.
      CHECK(static_cast<double>(counters.evaluations) < 12 + 60 + 17 * t);
    }
  }
}

TEST_CASE("the series notices a spectrum outside its interval, and damping") {
  const Matrix h = random_hermitian(30, 4);
  const Vector x = Vector::Ones(30) / std::sqrt(30.0);
  SECTION("too small an interval") {
    const Matrix g = Complex(0, -1) * h;
    Counters counters;
    const Vector y = series(g, 9, 1e-10, x, counters, Interval{0, 1});
    CHECK((y - exponential_of(9 * g) * x).norm() < 1e-9);
    CHECK(counters.rejected > 0);
  }
  SECTION("damping") {
    Matrix g = Complex(0, -1) * h;
    for (Eigen::Index i = 0; i < 30; ++i) g(i, i) -= 0.05 * static_cast<double>(i);
    Counters counters;
    CHECK((series(g, 9, 1e-10, x, counters) - exponential_of(9 * g) * x).norm() < 1e-9);
  }
}

TEST_CASE("the spectrum of a known matrix is found") {
  Matrix h = Matrix::Zero(200, 200);
  for (Eigen::Index i = 0; i < 200; ++i) h(i, i) = -3 + 0.05 * static_cast<double>(i);  // [-3, 6.95]
  const Matrix g = Complex(0, -1) * h;
  Counters counters;
  const Interval interval = estimate_spectrum(product_of(g), 400, 20, counters);
  CHECK(interval.centre == Approx(1.975).margin(0.3));
  CHECK(interval.radius == Approx(4.975).margin(0.4));
  CHECK(counters.evaluations == 20);
}

TEST_CASE("dense exponentials agree with each other and with the eigenvalues") {
  const Matrix h = random_hermitian(16, 5);
  const Matrix g = Complex(0, -1) * h;
  const Vector x = Vector::Ones(16) / 4;
  const Vector one = evolve(skew_spectrum(g), 3.7, x);
  CHECK((one - dense_exponential(g, 3.7) * x).norm() < 1e-12);
  CHECK(one.norm() == Approx(1).margin(1e-13));
}

TEST_CASE("energies are taken out lane by lane, whatever the number of lanes") {
  for (const std::size_t lanes : {1u, 2u, 4u, 8u}) {
    // Lane l holds an eigenstate of energy 1 + l on eight amplitudes: d = -i E y.
    const std::size_t amplitudes = 8;
    AlignedArray y(2 * amplitudes * lanes), d(2 * amplitudes * lanes), turned(2 * amplitudes * lanes);
    std::vector<Complex> phases;
    for (std::size_t l = 0; l < lanes; ++l) {
      phases.push_back(std::polar(1.0, 0.3 * static_cast<double>(l + 1)));
      for (std::size_t i = 0; i < amplitudes; ++i) {
        const Complex a(0.1 * static_cast<double>(i + 1), 0.2 - 0.05 * static_cast<double>(i * l));
        const Complex b = Complex(0, -1.0 - static_cast<double>(l)) * a;
        y.data()[2 * i * lanes + l] = a.real();
        y.data()[(2 * i + 1) * lanes + l] = a.imag();
        d.data()[2 * i * lanes + l] = b.real();
        d.data()[(2 * i + 1) * lanes + l] = b.imag();
      }
    }
    std::vector<double> means(lanes);
    mean_energies(y.size(), lanes, y.data(), d.data(), means.data());
    for (std::size_t l = 0; l < lanes; ++l) CHECK(means[l] == Approx(1.0 + static_cast<double>(l)));
    add_turned(y.size(), turn_weights(lanes, means.data()), y.data(), d.data());
    for (std::size_t i = 0; i < d.size(); ++i) CHECK(std::abs(d.data()[i]) < 1e-14);
    turn(y.size(), lanes, phases.data(), y.data(), turned.data());
    for (std::size_t l = 0; l < lanes; ++l) {
      const Complex before(y.data()[2 * lanes + l], y.data()[3 * lanes + l]);
      const Complex after(turned.data()[2 * lanes + l], turned.data()[3 * lanes + l]);
      CHECK(std::abs(after - phases[l] * before) < 1e-15);
    }
  }
}
