#include "runtime/levels/rotation.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <type_traits>

#include "runtime/levels/product.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// A bound on the largest angle.
template <class Scalar>
double row_sum(const Matrix<Scalar>& w) {
  if (w.size() == 0) return 0.0;
  if constexpr (std::is_same_v<Scalar, double>) {
    return w.cwiseAbs().colwise().sum().maxCoeff();
  } else {
    return (w.real().cwiseAbs() + w.imag().cwiseAbs()).colwise().sum().maxCoeff();
  }
}

/// Taylor polynomial of order 2, 4, 6 or 8 for |w| <= norm; `power` holds what it needs in between.
template <class Scalar>
void series(const Matrix<Scalar>& w, double norm, Matrix<Scalar>& r, Matrix<Scalar>* power, Scratch& scratch) {
  Matrix<Scalar>&w2 = power[0], &w3 = power[1], &w4 = power[2], &rest = power[3];
  multiply<Scalar>(w, w, w2, scratch);
  if (norm < 1e-5) {
    r = w + 0.5 * w2;
  } else if (norm < 1.5e-3) {
    rest = (1.0 / 6.0) * w + (1.0 / 24.0) * w2;
    rest.diagonal().array() += 0.5;
    multiply<Scalar>(w2, rest, r, scratch);
    r += w;
  } else if (norm < 0.015) {
    multiply<Scalar>(w2, w, w3, scratch);
    rest = (1.0 / 24.0) * w + (1.0 / 120.0) * w2 + (1.0 / 720.0) * w3;
    rest.diagonal().array() += 1.0 / 6.0;
    multiply<Scalar>(w3, rest, r, scratch);
    r += w + 0.5 * w2;
  } else {
    multiply<Scalar>(w2, w, w3, scratch);
    multiply<Scalar>(w2, w2, w4, scratch);
    rest = (1.0 / 120.0) * w + (1.0 / 720.0) * w2 + (1.0 / 5040.0) * w3 + (1.0 / 40320.0) * w4;
    rest.diagonal().array() += 1.0 / 24.0;
    multiply<Scalar>(w4, rest, r, scratch);
    r += w + 0.5 * w2 + (1.0 / 6.0) * w3;
  }
  r.diagonal().array() += 1.0;
}

template <class Scalar>
void exponential(const Matrix<Scalar>& w, Matrix<Scalar>& r, Matrix<Scalar>* power, Scratch& scratch) {
  const double norm = row_sum<Scalar>(w);
  if (norm < 0.06) return series<Scalar>(w, norm, r, power, scratch);
  const int halvings = static_cast<int>(std::ceil(std::log2(norm / 0.06)));
  const Matrix<Scalar> part = w * std::ldexp(1.0, -halvings);
  series<Scalar>(part, 0.06, r, power, scratch);
  for (int k = 0; k < halvings; ++k) {
    multiply<Scalar>(r, r, power[0], scratch);
    r.swap(power[0]);
  }
}

/// Sum of the series of asinh, S - S^3/6 + ..., for |S| < 0.2.
template <class Scalar>
Matrix<Scalar> asinh_series(const Matrix<Scalar>& sine, double norm) {
  const Matrix<Scalar> square = product<Scalar>(sine, sine);
  Matrix<Scalar> power = sine, sum = sine;
  double coefficient = 1;
  for (int k = 1; std::pow(norm, 2 * k + 1) > 1e-16 && k < 12; ++k) {
    power = product<Scalar>(power, square);
    coefficient *= -(2.0 * k - 1) / (2.0 * k);
    sum += coefficient / (2.0 * k + 1) * power;
  }
  return sum;
}

}  // namespace

template <class Scalar>
Matrix<Scalar> rotation_exponential(const Matrix<Scalar>& w) {
  Scratch scratch;
  Matrix<Scalar> r, power[4];
  exponential<Scalar>(w, r, power, scratch);
  return r;
}

void rotation_exponential(const Matrix<Complex>& w, Matrix<Complex>& r, Scratch& scratch) {
  exponential<Complex>(w, r, scratch.power, scratch);
}

template <class Scalar>
Matrix<Scalar> rotation_logarithm(const Matrix<Scalar>& r) {
  Matrix<Scalar> w = 0.5 * (r - r.adjoint());
  const double norm = row_sum<Scalar>(w);
  if (norm < 0.2) return asinh_series<Scalar>(w, norm);
  for (int k = 0; k < 8; ++k) {
    const Matrix<Scalar> rest = product<Scalar>(r, rotation_exponential<Scalar>(-w));
    const Matrix<Scalar> sine = 0.5 * (rest - rest.adjoint());
    w += sine;
    if (row_sum<Scalar>(sine) < 1e-5) break;
  }
  return w;
}

template Matrix<double> rotation_exponential<double>(const Matrix<double>&);
template Matrix<Complex> rotation_exponential<Complex>(const Matrix<Complex>&);
template Matrix<double> rotation_logarithm<double>(const Matrix<double>&);
template Matrix<Complex> rotation_logarithm<Complex>(const Matrix<Complex>&);

}  // namespace tarn::runtime
