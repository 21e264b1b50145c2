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
void multiply<double>(const Matrix<double>& a, const Matrix<double>& b, Matrix<double>& c, Scratch&) {
  TARN_CHECK(a.cols() == b.rows());
  c.resize(a.rows(), b.cols());
  if (a.rows() < kWidth) {
    c.noalias() = a * b;
    return;
  }
  multiply_packed(a.data(), b.data(), c.data(), a.rows(), a.cols(), b.cols());
  const Index rest = a.rows() % kWidth;
  if (rest != 0) c.bottomRows(rest).noalias() = a.bottomRows(rest) * b;
}

// One real product: [Re a, Im a] times [[Re b, Im b], [-Im b, Re b]].
template <>
void multiply<std::complex<double>>(const Matrix<std::complex<double>>& a, const Matrix<std::complex<double>>& b,
                                    Matrix<std::complex<double>>& c, Scratch& scratch) {
  const Index rows = a.rows(), inner = a.cols(), columns = b.cols();
  c.resize(rows, columns);
  if (rows < kWidth) {
    c.noalias() = a * b;
    return;
  }
  scratch.left.resize(rows, 2 * inner);
  scratch.right.resize(2 * inner, 2 * columns);
  scratch.left.leftCols(inner) = a.real();
  scratch.left.rightCols(inner) = a.imag();
  scratch.right.topLeftCorner(inner, columns) = b.real();
  scratch.right.bottomLeftCorner(inner, columns) = -b.imag();
  scratch.right.topRightCorner(inner, columns) = b.imag();
  scratch.right.bottomRightCorner(inner, columns) = b.real();
  multiply<double>(scratch.left, scratch.right, scratch.both, scratch);
  c.real() = scratch.both.leftCols(columns);
  c.imag() = scratch.both.rightCols(columns);
}

void turn(const Matrix<std::complex<double>>& r, Eigen::MatrixXcd& rho, Scratch& scratch) {
  scratch.adjoint = r.adjoint();
  multiply<std::complex<double>>(r, rho, scratch.turned, scratch);
  multiply<std::complex<double>>(scratch.turned, scratch.adjoint, rho, scratch);
}

}  // namespace tarn::runtime
