#include "runtime/levels/rotation.h"

#include <algorithm>
#include <cmath>
#include <complex>

#include "runtime/levels/product.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// A bound on the largest angle.
template <class Scalar>
double row_sum(const Matrix<Scalar>& w) {
  return w.size() == 0 ? 0.0 : w.cwiseAbs().colwise().sum().maxCoeff();
}

template <class Scalar>
Matrix<Scalar> series(const Matrix<Scalar>& w, double norm) {
  const Matrix<Scalar> one = Matrix<Scalar>::Identity(w.rows(), w.cols());
  const Matrix<Scalar> w2 = product<Scalar>(w, w);
  if (norm < 1e-5) return one + w + 0.5 * w2;
  if (norm < 1.5e-3) return one + w + product<Scalar>(w2, 0.5 * one + w / 6.0 + w2 / 24.0);
  const Matrix<Scalar> w3 = product<Scalar>(w2, w);
  if (norm < 0.015) return one + w + 0.5 * w2 + product<Scalar>(w3, one / 6.0 + w / 24.0 + w2 / 120.0 + w3 / 720.0);
  const Matrix<Scalar> w4 = product<Scalar>(w2, w2);
  return one + w + 0.5 * w2 + w3 / 6.0 + product<Scalar>(w4, one / 24.0 + w / 120.0 + w2 / 720.0 + w3 / 5040.0 + w4 / 40320.0);
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
  const double norm = row_sum<Scalar>(w);
  if (norm < 0.06) return series<Scalar>(w, norm);
  const int halvings = static_cast<int>(std::ceil(std::log2(norm / 0.06)));
  Matrix<Scalar> r = series<Scalar>(w / std::ldexp(1.0, halvings), 0.06);
  for (int k = 0; k < halvings; ++k) r = product<Scalar>(r, r);
  return r;
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
