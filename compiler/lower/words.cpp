#include "compiler/lower/words.h"

#include <bit>
#include <complex>

namespace tarn::compiler {
namespace {

std::complex<double> power_of_i(int exponent) {
  static constexpr std::complex<double> kPowers[] = {{1, 0}, {0, 1}, {-1, 0}, {0, -1}};
  return kPowers[((exponent % 4) + 4) % 4];
}

int ys(const runtime::PauliWord& word) { return std::popcount(word.x & word.z); }

}  // namespace

runtime::WordTerm product(const runtime::PauliWord& a, const runtime::PauliWord& b) {
  const runtime::PauliWord word{a.x ^ b.x, a.z ^ b.z};
  const double sign = std::popcount(a.z & b.x) % 2 == 0 ? 1 : -1;
  return {sign * power_of_i(ys(a) + ys(b) - ys(word)), word};
}

double transpose_sign(const runtime::PauliWord& word) { return ys(word) % 2 == 0 ? 1 : -1; }

runtime::PauliWord side_by_side(const runtime::PauliWord& left, const runtime::PauliWord& right,
                                std::uint32_t bits) {
  return {(left.x << bits) | right.x, (left.z << bits) | right.z};
}

}  // namespace tarn::compiler
