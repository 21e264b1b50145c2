#include "runtime/generator/small_apply.h"

#include "lang/support/check.h"
#include "runtime/generator/small_square.h"
#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

template <int N>
inline __attribute__((always_inline)) void apply(const double* drift, std::span<const SmallTerm> terms, const double* rho, double* out) {
  small::Square<N> state, left, half, other, x;
  small::load<N>(rho, state);
  small::load<N>(drift, left);
  small::clear<N>(x);
  small::add_product<N>(left, state, x);
  for (const SmallTerm& term : terms) {
    if (term.diagonal != nullptr) {
      for (int j = 0; j < N; ++j) {
        half.re[j] = state.re[j] * term.diagonal[j];
        half.im[j] = state.im[j] * term.diagonal[j];
      }
    } else {
      // rho right^dagger = (right rho)^dagger.
      small::clear<N>(other);
      if (term.real) {
        small::load_real<N>(term.left, left);
        small::add_real_product<N>(left, state, other);
      } else {
        small::load<N>(term.right != nullptr ? term.right : term.left, left);
        small::add_product<N>(left, state, other);
      }
      small::adjoint<N>(other, half);
    }
    if (term.real) {
      small::add_real_product<N>(left, half, x);
      continue;
    }
    if (term.diagonal != nullptr || term.right != nullptr) small::load<N>(term.left, left);
    small::add_product<N>(left, half, x);
  }
  small::store_hermitian<N>(x, out);
}

TARN_HOST_CLONES
void apply2(const double* drift, std::span<const SmallTerm> terms, const double* rho, double* out) { apply<2>(drift, terms, rho, out); }
TARN_HOST_CLONES
void apply4(const double* drift, std::span<const SmallTerm> terms, const double* rho, double* out) { apply<4>(drift, terms, rho, out); }
TARN_HOST_CLONES
void apply8(const double* drift, std::span<const SmallTerm> terms, const double* rho, double* out) { apply<8>(drift, terms, rho, out); }

}  // namespace

void apply_small(Eigen::Index n, const double* drift, std::span<const SmallTerm> terms, const double* rho, double* out) {
  if (n == 2) return apply2(drift, terms, rho, out);
  if (n == 4) return apply4(drift, terms, rho, out);
  TARN_CHECK(n == 8);
  apply8(drift, terms, rho, out);
}

}  // namespace tarn::runtime
