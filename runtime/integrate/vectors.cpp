#include "runtime/integrate/vectors.h"

#include <algorithm>
#include <array>
#include <cstring>

#include "lang/support/check.h"
#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

using Patterns = std::array<Pack, kMostVectors>;

/// Weights repeated so that they line up with eight consecutive doubles of interleaved lanes.
void fill_patterns(std::size_t count, std::size_t lanes, const double* weights, Patterns& out) {
  TARN_CHECK(count >= 1 && count <= kMostVectors);
  TARN_CHECK(lanes >= 1 && kPackWidth % lanes == 0);
  for (std::size_t j = 0; j < count; ++j)
    for (std::size_t k = 0; k < kPackWidth; ++k) out[j][k] = weights[j * lanes + (k & (lanes - 1))];
}

template <std::size_t N>
[[gnu::always_inline]] inline void combine_fixed(std::size_t length, const double* const* vectors,
                                                 const Pack* weights, double* out) {
  for (std::size_t i = 0; i < length; i += kPackWidth) {
    Pack sum = weights[0] * pack(vectors[0] + i);
#pragma GCC unroll 16
    for (std::size_t j = 1; j < N; ++j) sum += weights[j] * pack(vectors[j] + i);
    pack(out + i) = sum;
  }
}

TARN_HOST_CLONES
void combine_packs(std::size_t length, std::size_t count, const double* const* vectors,
                   const Pack* weights, double* out) {
  switch (count) {
    case 1: return combine_fixed<1>(length, vectors, weights, out);
    case 2: return combine_fixed<2>(length, vectors, weights, out);
    case 3: return combine_fixed<3>(length, vectors, weights, out);
    case 4: return combine_fixed<4>(length, vectors, weights, out);
    case 5: return combine_fixed<5>(length, vectors, weights, out);
    case 6: return combine_fixed<6>(length, vectors, weights, out);
    case 7: return combine_fixed<7>(length, vectors, weights, out);
    case 8: return combine_fixed<8>(length, vectors, weights, out);
    case 9: return combine_fixed<9>(length, vectors, weights, out);
    case 10: return combine_fixed<10>(length, vectors, weights, out);
    case 11: return combine_fixed<11>(length, vectors, weights, out);
    case 12: return combine_fixed<12>(length, vectors, weights, out);
    case 13: return combine_fixed<13>(length, vectors, weights, out);
    case 14: return combine_fixed<14>(length, vectors, weights, out);
    case 15: return combine_fixed<15>(length, vectors, weights, out);
    default: return combine_fixed<16>(length, vectors, weights, out);
  }
}

TARN_HOST_CLONES
void squares_packs(std::size_t length, std::size_t count, const double* const* vectors,
                   const Pack* first, const Pack* second, Pack* sums) {
  Pack first_sum{}, second_sum{};
  for (std::size_t i = 0; i < length; i += kPackWidth) {
    Pack x{}, y{};
    for (std::size_t j = 0; j < count; ++j) {
      x += first[j] * pack(vectors[j] + i);
      y += second[j] * pack(vectors[j] + i);
    }
    first_sum += x * x;
    second_sum += y * y;
  }
  sums[0] = first_sum;
  sums[1] = second_sum;
}

void fold(const Pack& sums, std::size_t lanes, double* squares) {
  std::fill_n(squares, lanes, 0.0);
  for (std::size_t k = 0; k < kPackWidth; ++k) squares[k % lanes] += sums[k];
}

}  // namespace

AlignedArray::AlignedArray(std::size_t count)
    : size_((std::max<std::size_t>(count, 1) + 2 * kPackWidth - 1) / (2 * kPackWidth) * (2 * kPackWidth)) {
  void* memory = std::aligned_alloc(64, size_ * sizeof(double));
  if (memory == nullptr) throw std::bad_alloc();
  std::memset(memory, 0, size_ * sizeof(double));
  data_.reset(static_cast<double*>(memory));
}

void combine(std::size_t length, std::size_t lanes, std::span<const double* const> vectors,
             const double* weights, double* out) {
  Patterns patterns;
  fill_patterns(vectors.size(), lanes, weights, patterns);
  combine_packs(length, vectors.size(), vectors.data(), patterns.data(), out);
}

void combined_squares(std::size_t length, std::size_t lanes, std::span<const double* const> vectors,
                      const double* first_weights, const double* second_weights,
                      double* first_squares, double* second_squares) {
  Patterns first, second;
  fill_patterns(vectors.size(), lanes, first_weights, first);
  fill_patterns(vectors.size(), lanes, second_weights, second);
  std::array<Pack, 2> sums;
  squares_packs(length, vectors.size(), vectors.data(), first.data(), second.data(), sums.data());
  fold(sums[0], lanes, first_squares);
  fold(sums[1], lanes, second_squares);
}

void squares(std::size_t length, std::size_t lanes, const double* x, double* result) {
  TARN_CHECK(lanes >= 1 && kPackWidth % lanes == 0);
  Pack sum{};
  for (std::size_t i = 0; i < length; i += kPackWidth) sum += pack(x + i) * pack(x + i);
  fold(sum, lanes, result);
}

void copy_lanes(std::size_t length, std::size_t lanes, const bool* take, const double* from,
                double* to) {
  for (std::size_t i = 0; i < length; i += lanes)
    for (std::size_t l = 0; l < lanes; ++l)
      if (take[l]) to[i + l] = from[i + l];
}

}  // namespace tarn::runtime
