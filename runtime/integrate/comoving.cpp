#include "runtime/integrate/comoving.h"

#include <array>

#include "lang/support/check.h"
#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

using Index = TurnWeights::Index;

/// Two packs hold whole amplitudes of every lane, whatever the number of lanes (1 to 8).
constexpr std::size_t kPair = 2 * kPackWidth;

TARN_HOST_CLONES
void turn_packs(std::size_t length, const TurnWeights& at, const Pack& cosines, const double* y, double* out) {
  const Index first = at.partner[0], second = at.partner[1];
  const Pack f0 = at.factors[0], f1 = at.factors[1], c = cosines;
  for (std::size_t i = 0; i < length; i += kPair) {
    const Pack a = pack(y + i), b = pack(y + i + kPackWidth);
    pack(out + i) = c * a + f0 * __builtin_shuffle(a, b, first);
    pack(out + i + kPackWidth) = c * b + f1 * __builtin_shuffle(a, b, second);
  }
}

/// Sums of y times the partner of d with sign, and of y squared.
TARN_HOST_CLONES
void overlaps(std::size_t length, const TurnWeights& at, const double* y, const double* d, Pack* sums) {
  const Index first = at.partner[0], second = at.partner[1];
  Pack energy{}, square{};
  for (std::size_t i = 0; i < length; i += kPair) {
    const Pack a = pack(y + i), b = pack(y + i + kPackWidth);
    const Pack p = pack(d + i), q = pack(d + i + kPackWidth);
    energy += at.factors[0] * a * __builtin_shuffle(p, q, first) +
              at.factors[1] * b * __builtin_shuffle(p, q, second);
    square += a * a + b * b;
  }
  sums[0] = energy;
  sums[1] = square;
}

}  // namespace

/// `lanes` is a power of two: no divisions here, small systems come often.
TurnWeights turn_weights(std::size_t lanes, const double* factors) {
  TARN_CHECK(lanes >= 1 && kPackWidth % lanes == 0);
  TurnWeights result;
  for (std::size_t k = 0; k < kPair; ++k) {
    const double factor = factors[k & (lanes - 1)];
    result.partner[k / kPackWidth][k % kPackWidth] = static_cast<long long>(k ^ lanes);
    result.factors[k / kPackWidth][k % kPackWidth] = (k & lanes) != 0 ? factor : -factor;
  }
  return result;
}

TARN_HOST_CLONES
void add_turned(std::size_t length, const TurnWeights& at, const double* y, double* d) {
  const Index first = at.partner[0], second = at.partner[1];
  const Pack f0 = at.factors[0], f1 = at.factors[1];
  for (std::size_t i = 0; i < length; i += kPair) {
    const Pack a = pack(y + i), b = pack(y + i + kPackWidth);
    pack(d + i) += f0 * __builtin_shuffle(a, b, first);
    pack(d + i + kPackWidth) += f1 * __builtin_shuffle(a, b, second);
  }
}

void mean_energies(std::size_t length, std::size_t lanes, const double* y, const double* d, double* means) {
  std::array<double, kPackWidth> ones;
  ones.fill(1);
  std::array<Pack, 2> sums;
  overlaps(length, turn_weights(lanes, ones.data()), y, d, sums.data());
  for (std::size_t l = 0; l < lanes; ++l) {
    double energy = 0, square = 0;
    for (std::size_t k = l; k < kPackWidth; k += lanes) {
      energy += sums[0][k];
      square += sums[1][k];
    }
    means[l] = square > 0 ? energy / square : 0;
  }
}

void turn(std::size_t length, std::size_t lanes, const std::complex<double>* phases, const double* y,
          double* out) {
  std::array<double, kPackWidth> sines{};
  Pack cosines{};
  for (std::size_t k = 0; k < kPackWidth; ++k) cosines[k] = phases[k & (lanes - 1)].real();
  for (std::size_t l = 0; l < lanes; ++l) sines[l] = phases[l].imag();
  turn_packs(length, turn_weights(lanes, sines.data()), cosines, y, out);
}

}  // namespace tarn::runtime
