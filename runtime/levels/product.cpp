#include "runtime/levels/product.h"

#include <complex>
#include <cstring>

#include "lang/support/check.h"
#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

using Index = Eigen::Index;

constexpr Index kWidth = static_cast<Index>(kPackWidth);

// Rows that fill packs, two packs and four columns at a time: eight sums stay in registers.
TARN_HOST_CLONES
void multiply_packed(const double* a, const double* b, double* c, Index rows, Index inner, Index columns) {
  const Index packed = rows / kWidth;
  for (Index j = 0; j < columns; j += 4) {
    const Index wide = columns - j < 4 ? columns - j : 4;
    for (Index i = 0; i < packed; i += 2) {
      const bool two = i + 1 < packed;
      Pack sum[2][4] = {};
      for (Index l = 0; l < inner; ++l) {
        Pack x, y;
        std::memcpy(&x, a + l * rows + i * kWidth, sizeof(Pack));
        std::memcpy(&y, a + l * rows + (two ? i + 1 : i) * kWidth, sizeof(Pack));
        if (wide == 4) {
          for (Index k = 0; k < 4; ++k) {
            const double factor = b[l + (j + k) * inner];
            sum[0][k] += x * factor;
            sum[1][k] += y * factor;
          }
        } else {
          for (Index k = 0; k < wide; ++k) {
            const double factor = b[l + (j + k) * inner];
            sum[0][k] += x * factor;
            sum[1][k] += y * factor;
          }
        }
      }
      for (Index k = 0; k < wide; ++k) {
        std::memcpy(c + (j + k) * rows + i * kWidth, &sum[0][k], sizeof(Pack));
        if (two) std::memcpy(c + (j + k) * rows + (i + 1) * kWidth, &sum[1][k], sizeof(Pack));
      }
    }
  }
}

}  // namespace

template <>
Matrix<double> product<double>(const Matrix<double>& a, const Matrix<double>& b) {
  TARN_CHECK(a.cols() == b.rows());
  if (a.rows() < kWidth) return a * b;
  Matrix<double> c(a.rows(), b.cols());
  multiply_packed(a.data(), b.data(), c.data(), a.rows(), a.cols(), b.cols());
  const Index rest = a.rows() % kWidth;
  if (rest != 0) c.bottomRows(rest).noalias() = a.bottomRows(rest) * b;
  return c;
}

template <>
Matrix<std::complex<double>> product<std::complex<double>>(const Matrix<std::complex<double>>& a, const Matrix<std::complex<double>>& b) {
  return a * b;
}

template <>
void turn<double>(const Matrix<double>& r, Eigen::MatrixXcd& rho) {
  const Index size = rho.rows();
  Matrix<double> parts(size, 2 * size);
  parts.leftCols(size) = rho.real();
  parts.rightCols(size) = rho.imag();
  const Matrix<double> half = product(r, parts);
  parts.leftCols(size) = half.leftCols(size).transpose();
  parts.rightCols(size) = half.rightCols(size).transpose();
  const Matrix<double> whole = product(r, parts);
  for (Index b = 0; b < size; ++b)
    for (Index a = 0; a < size; ++a) rho(a, b) = {whole(b, a), whole(b, size + a)};
}

template <>
void turn<std::complex<double>>(const Matrix<std::complex<double>>& r, Eigen::MatrixXcd& rho) {
  const Eigen::MatrixXcd half = r * rho;
  rho.noalias() = half * r.adjoint();
}

}  // namespace tarn::runtime
