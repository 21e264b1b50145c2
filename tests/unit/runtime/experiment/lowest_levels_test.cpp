#include <catch2/catch.hpp>

#include <cmath>
#include <numbers>

#include "runtime/experiment/lowest_levels.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using Eigen::Index;
using Complex = std::complex<double>;

namespace {

/// H = -g sum X - J sum Z Z on a ring, applied bit by bit.
HermitianProduct ring(int n, double g, double j) {
  return [=](const Complex* x, Complex* y) {
    const Index size = Index{1} << n;
    for (Index i = 0; i < size; ++i) {
      double diagonal = 0;
      Complex flips = 0;
      for (int q = 0; q < n; ++q) {
        diagonal += (((i >> q) ^ (i >> ((q + 1) % n))) & 1) ? j : -j;
        flips += x[i ^ (Index{1} << q)];
      }
      y[i] = diagonal * x[i] - g * flips;
    }
  };
}

double orthonormality(const Eigen::MatrixXcd& v) {
  return (v.adjoint() * v - Eigen::MatrixXcd::Identity(v.cols(), v.cols())).norm();
}

}  // namespace

TEST_CASE("ground energy of the transverse-field ring of 10 spins") {
  // Closed form: -sum_k sqrt(g^2 + J^2 - 2 g J cos k), k = (2m+1) pi/n (Ann. Phys. 57, 79 (1970)).
  const int n = 10;
  const double g = 1.3, j = 0.7;
  double expected = 0;
  for (int m = 0; m < n; ++m) {
    expected -= std::sqrt(g * g + j * j - 2 * g * j * std::cos((2 * m + 1) * std::numbers::pi / n));
  }
  const auto levels = lowest_levels(1 << n, 3, ring(n, g, j), GENERATE(true, false), {}, {});
  REQUIRE(levels);
  CHECK(levels->energies[0] == Approx(expected).epsilon(1e-12));
  CHECK(orthonormality(levels->vectors) < 1e-12);
  CHECK(levels->residual < 1e-10 * levels->width);
  // E is odd under turning every second spin at even n, so the width is twice the ground energy.
  CHECK(levels->width == Approx(-2 * expected).epsilon(0.05));
}

TEST_CASE("every copy of a degenerate level is found, also beyond the block") {
  // At g = 0 the two aligned states are lowest; next come n(n-1) states with two walls.
  const int n = 9;
  const auto levels = lowest_levels(1 << n, 24, ring(n, 0, 1), true, {}, {});
  REQUIRE(levels);
  CHECK(levels->energies[0] == Approx(-n));
  CHECK(levels->energies[1] == Approx(-n));
  for (Index k = 2; k < 24; ++k) CHECK(levels->energies[k] == Approx(4.0 - n));
  CHECK(orthonormality(levels->vectors) < 1e-11);
}

TEST_CASE("a complex Hermitian matrix against a dense solve") {
  // Reference: Eigen 3.4, SelfAdjointEigenSolver.
  const Index size = 96;
  std::srand(7);
  Eigen::MatrixXcd m = Eigen::MatrixXcd::Random(size, size);
  m = (m + m.adjoint()).eval();
  const HermitianProduct product = [&](const Complex* x, Complex* y) {
    Eigen::Map<Eigen::VectorXcd>(y, size) = m * Eigen::Map<const Eigen::VectorXcd>(x, size);
  };
  const auto dense = tarn::test::dense_levels_of(m);
  CHECK((all_levels(m).energies - dense.energies).norm() < 1e-11);
  const auto few = lowest_levels(size, 5, product, false, {}, {});
  REQUIRE(few);
  for (Index k = 0; k < 5; ++k) {
    CHECK(few->energies[k] == Approx(dense.energies[k]).epsilon(1e-12));
    CHECK(std::abs(few->vectors.col(k).dot(dense.vectors.col(k))) == Approx(1).epsilon(1e-9));
  }
  SECTION("a good start gives the same levels") {
    const auto again = lowest_levels(size, 5, product, false, few->vectors, {});
    REQUIRE(again);
    CHECK((again->energies - few->energies).norm() < 1e-10);
  }
}

TEST_CASE("a constant matrix and an interrupted search") {
  const HermitianProduct zero = [](const Complex*, Complex* y) { std::fill(y, y + 64, Complex(0)); };
  const auto levels = lowest_levels(64, 4, zero, true, {}, {});
  REQUIRE(levels);
  CHECK(levels->energies.norm() == 0);
  CHECK(lowest_levels(512, 2, ring(9, 1, 1), true, {}, [] { return true; }).error().kind == "interrupted");
}
