#include "lang/support/check.h"
#include "runtime/equation/hierarchy_blocks.h"
#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

/// A row of a matrix goes into one vector; of a 2 x 2 matrix both do.
template <int N>
struct Rows;
template <>
struct Rows<2> {
  static constexpr int kCount = 1;
  using Vector = double __attribute__((vector_size(32), may_alias));
};
template <>
struct Rows<4> {
  static constexpr int kCount = 4;
  using Vector = double __attribute__((vector_size(32), may_alias));
};
template <>
struct Rows<8> {
  static constexpr int kCount = 8;
  using Vector = double __attribute__((vector_size(64), may_alias));
};

template <int N>
struct Planes {
  typename Rows<N>::Vector re[Rows<N>::kCount], im[Rows<N>::kCount];
};

template <int N>
[[gnu::always_inline]] inline const Planes<N>& planes_at(const double* p) {
  return *reinterpret_cast<const Planes<N>*>(p);
}

template <bool Left, bool Right>
[[gnu::always_inline]] inline void add_products_of_pair(const double* a, const Planes<2>& x, const Planes<2>& y, const double* b,
                                                  Planes<2>& out) {
  using Vector = Rows<2>::Vector;
  using Lanes = long long __attribute__((vector_size(4 * sizeof(long long))));
  constexpr Lanes kRows[2] = {{0, 1, 0, 1}, {2, 3, 2, 3}}, kColumns[2] = {{0, 0, 2, 2}, {1, 1, 3, 3}};
  const Planes<2>&left = planes_at<2>(a), &right = planes_at<2>(b);
  Vector re = out.re[0], im = out.im[0];
#pragma GCC unroll 2
  for (int k = 0; k < 2; ++k) {
    const Vector ar = __builtin_shuffle(left.re[0], kColumns[k]), ai = __builtin_shuffle(left.im[0], kColumns[k]);
    const Vector xr = __builtin_shuffle(x.re[0], kRows[k]), xi = __builtin_shuffle(x.im[0], kRows[k]);
    const Vector yr = __builtin_shuffle(y.re[0], kColumns[k]), yi = __builtin_shuffle(y.im[0], kColumns[k]);
    const Vector br = __builtin_shuffle(right.re[0], kRows[k]), bi = __builtin_shuffle(right.im[0], kRows[k]);
    if constexpr (Left) {
      re += ar * xr - ai * xi;
      im += ar * xi + ai * xr;
    }
    if constexpr (Right) {
      re += yr * br - yi * bi;
      im += yr * bi + yi * br;
    }
  }
  out.re[0] = re;
  out.im[0] = im;
}

/// out += a x if Left, + y b if Right. Row i of a x is the sum of rows k of x times a_ik, row i of y b that of rows k
/// of b times y_ik.
template <int N, bool Left, bool Right>
[[gnu::always_inline]] inline void add_products_by_rows(const double* a, const Planes<N>& x, const Planes<N>& y, const double* b,
                                                Planes<N>& out) {
  using Vector = typename Rows<N>::Vector;
  const double* y_parts = reinterpret_cast<const double*>(&y);
  const Planes<N>& rows = planes_at<N>(b);
#pragma GCC unroll 8
  for (int i = 0; i < N; ++i) {
    Vector re = out.re[i], im = out.im[i];
#pragma GCC unroll 8
    for (int k = 0; k < N; ++k) {
      const double ar = a[i * N + k], ai = a[N * N + i * N + k];
      const double yr = y_parts[i * N + k], yi = y_parts[N * N + i * N + k];
      if constexpr (Left) {
        re += ar * x.re[k] - ai * x.im[k];
        im += ar * x.im[k] + ai * x.re[k];
      }
      if constexpr (Right) {
        re += yr * rows.re[k] - yi * rows.im[k];
        im += yr * rows.im[k] + yi * rows.re[k];
      }
    }
    out.re[i] = re;
    out.im[i] = im;
  }
}

template <int N, bool Left, bool Right>
[[gnu::always_inline]] inline void add_products(const double* a, const Planes<N>& x, const Planes<N>& y, const double* b,
                                                Planes<N>& out) {
  if constexpr (N == 2) add_products_of_pair<Left, Right>(a, x, y, b, out);
  else add_products_by_rows<N, Left, Right>(a, x, y, b, out);
}

/// P = sum of `sum` x, D = sum of `difference` x over the links of one matrix and coupling.
template <int N, bool Plain>
[[gnu::always_inline]] inline void gather(const HierarchyIndices& indices, std::size_t part, std::size_t from, const double* x,
                                          Planes<N>& p, Planes<N>& d) {
  constexpr int kCount = Rows<N>::kCount;
  p = d = Planes<N>{};
  const std::size_t up = indices.ends[part], down = indices.ends[part + 1];
  for (std::size_t l = from; l < up; ++l) {
    const double f = indices.factors[indices.links[l].row].sum.real();
    const Planes<N>& other = planes_at<N>(x + indices.links[l].to * std::size_t{2 * N * N});
#pragma GCC unroll 8
    for (int v = 0; v < kCount; ++v) {
      p.re[v] += f * other.re[v];
      p.im[v] += f * other.im[v];
    }
  }
  for (std::size_t l = up; l < down; ++l) {
    const HierarchyFactors& factors = indices.factors[indices.links[l].row];
    const double sr = factors.sum.real(), si = factors.sum.imag();
    const double dr = factors.difference.real(), di = factors.difference.imag();
    const Planes<N>& other = planes_at<N>(x + indices.links[l].to * std::size_t{2 * N * N});
#pragma GCC unroll 8
    for (int v = 0; v < kCount; ++v) {
      p.re[v] += sr * other.re[v];
      p.im[v] += sr * other.im[v];
      d.re[v] -= di * other.im[v];
      d.im[v] += di * other.re[v];
      if constexpr (!Plain) {
        p.re[v] -= si * other.im[v];
        p.im[v] += si * other.re[v];
        d.re[v] += dr * other.re[v];
        d.im[v] += dr * other.im[v];
      }
    }
  }
}

/// out += -i [A, P] - i {A, D}.
template <int N>
[[gnu::always_inline]] inline void add_coupling(const HierarchyCoupling& coupling, Planes<N>& p, Planes<N>& d, Planes<N>& out) {
  constexpr int kCount = Rows<N>::kCount;
  using Vector = typename Rows<N>::Vector;
  if (coupling.diagonal) {
    const auto* differences = reinterpret_cast<const Vector*>(coupling.differences.data());
    const auto* sums = reinterpret_cast<const Vector*>(coupling.sums.data());
#pragma GCC unroll 8
    for (int v = 0; v < kCount; ++v) {
      out.re[v] += differences[v] * p.im[v] + sums[v] * d.im[v];
      out.im[v] -= differences[v] * p.re[v] + sums[v] * d.re[v];
    }
    return;
  }
#pragma GCC unroll 8
  for (int v = 0; v < kCount; ++v) {  // A (-i P - i D) + (i P - i D) A.
    const Vector p_re = p.re[v], p_im = p.im[v], d_re = d.re[v];
    p.re[v] = p_im + d.im[v];
    p.im[v] = -p_re - d_re;
    d.re[v] = d.im[v] - p_im;
    d.im[v] = p_re - d_re;
  }
  add_products<N, true, true>(coupling.matrix.data(), p, d, coupling.matrix.data(), out);
}

template <int N>
[[gnu::always_inline]] inline void sweep(const HierarchyIndices& indices, const HierarchyOperators& operators, const double* x,
                                         double* derivative) {
  constexpr int kCount = Rows<N>::kCount;
  constexpr std::size_t kSize = 2 * N * N;
  const auto* white = reinterpret_cast<const typename Rows<N>::Vector*>(operators.white.data());
  std::size_t from = 0, part = 0;
  for (std::size_t a = 0; a < indices.count; ++a) {
    const Planes<N>& here = planes_at<N>(x + a * kSize);
    const double dr = indices.decay[a].real(), di = indices.decay[a].imag();
    Planes<N> out, p, d;
#pragma GCC unroll 8
    for (int v = 0; v < kCount; ++v) {
      out.re[v] = di * here.im[v] - (dr + white[v]) * here.re[v];
      out.im[v] = -di * here.re[v] - (dr + white[v]) * here.im[v];
    }
    add_products<N, true, true>(operators.left.data(), here, here, operators.right.data(), out);
    for (const HierarchySandwich& sandwich : operators.sandwiches) {
      Planes<N> inner{};
      add_products<N, true, false>(sandwich.first.data(), here, here, sandwich.second.data(), inner);
      add_products<N, false, true>(sandwich.first.data(), inner, inner, sandwich.second.data(), out);
    }
    for (std::size_t c = 0; c < indices.couplings; ++c, part += 2) {
      if (indices.plain[c]) gather<N, true>(indices, part, from, x, p, d);
      else gather<N, false>(indices, part, from, x, p, d);
      from = indices.ends[part + 1];
      add_coupling<N>(operators.couplings[c], p, d, out);
    }
    Planes<N>& target = *reinterpret_cast<Planes<N>*>(derivative + a * kSize);
    target = out;
  }
}

TARN_HOST_CLONES
void sweep_2(const HierarchyIndices& indices, const HierarchyOperators& operators, const double* x, double* d) {
  sweep<2>(indices, operators, x, d);
}

TARN_HOST_CLONES
void sweep_4(const HierarchyIndices& indices, const HierarchyOperators& operators, const double* x, double* d) {
  sweep<4>(indices, operators, x, d);
}

TARN_HOST_CLONES
void sweep_8(const HierarchyIndices& indices, const HierarchyOperators& operators, const double* x, double* d) {
  sweep<8>(indices, operators, x, d);
}

}  // namespace

void hierarchy_sweep(Eigen::Index dimension, const HierarchyIndices& indices, const HierarchyOperators& operators,
                     const double* x, double* d) {
  switch (dimension) {
    case 2: return sweep_2(indices, operators, x, d);
    case 4: return sweep_4(indices, operators, x, d);
    case 8: return sweep_8(indices, operators, x, d);
    default: TARN_CHECK(false);
  }
}

}  // namespace tarn::runtime
