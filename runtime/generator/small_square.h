#pragma once
/// \file Complex 2 x 2, 4 x 4 and 8 x 8 matrices with a register for the real and the imaginary part of
/// every column. Everything is inlined into the functions that are built for several instruction sets.

#include <cstddef>

namespace tarn::runtime::small {

#define TARN_INLINE inline __attribute__((always_inline))

template <int N>
struct Column {
  typedef double Type __attribute__((vector_size(N * sizeof(double))));
};

/// Columns: m(i, j) = re[j][i] + i im[j][i].
template <int N>
struct Square {
  typename Column<N>::Type re[N], im[N];
};

/// From N^2 pairs, column after column.
template <int N>
TARN_INLINE void load(const double* pairs, Square<N>& m) {
  for (int j = 0; j < N; ++j)
    for (int i = 0; i < N; ++i) {
      m.re[j][i] = pairs[2 * (i + N * j)];
      m.im[j][i] = pairs[2 * (i + N * j) + 1];
    }
}

/// From N^2 real numbers.
template <int N>
TARN_INLINE void load_real(const double* values, Square<N>& m) {
  for (int j = 0; j < N; ++j)
    for (int i = 0; i < N; ++i) {
      m.re[j][i] = values[i + N * j];
      m.im[j][i] = 0;
    }
}

/// c += a b.
template <int N>
TARN_INLINE void add_product(const Square<N>& a, const Square<N>& b, Square<N>& c) {
  for (int j = 0; j < N; ++j) {
    auto re = c.re[j], im = c.im[j];
    for (int l = 0; l < N; ++l) {
      const double x = b.re[j][l], y = b.im[j][l];
      re += a.re[l] * x - a.im[l] * y;
      im += a.re[l] * y + a.im[l] * x;
    }
    c.re[j] = re;
    c.im[j] = im;
  }
}

/// c += a b with a real.
template <int N>
TARN_INLINE void add_real_product(const Square<N>& a, const Square<N>& b, Square<N>& c) {
  for (int j = 0; j < N; ++j) {
    auto re = c.re[j], im = c.im[j];
    for (int l = 0; l < N; ++l) {
      re += a.re[l] * b.re[j][l];
      im += a.re[l] * b.im[j][l];
    }
    c.re[j] = re;
    c.im[j] = im;
  }
}

template <int N>
TARN_INLINE void clear(Square<N>& m) {
  for (int j = 0; j < N; ++j) m.re[j] = m.im[j] = typename Column<N>::Type{};
}

template <int N>
TARN_INLINE void adjoint(const Square<N>& m, Square<N>& out) {
  for (int j = 0; j < N; ++j)
    for (int i = 0; i < N; ++i) {
      out.re[j][i] = m.re[i][j];
      out.im[j][i] = -m.im[i][j];
    }
}

/// m + m^dagger as pairs.
template <int N>
TARN_INLINE void store_hermitian(const Square<N>& m, double* pairs) {
  for (int j = 0; j < N; ++j)
    for (int i = 0; i < N; ++i) {
      pairs[2 * (i + N * j)] = m.re[j][i] + m.re[i][j];
      pairs[2 * (i + N * j) + 1] = m.im[j][i] - m.im[i][j];
    }
}

#undef TARN_INLINE

}  // namespace tarn::runtime::small
