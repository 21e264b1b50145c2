#pragma once
/// \file Aligned arrays of doubles and the few sweeps over them that integrators need.
///
/// An array of `lanes` interleaved vectors holds component i of lane l at i lanes + l (see
/// runtime/abi/kernel.h); one plain vector is the case lanes = 1. `lanes` divides 8.
/// Lengths of arrays are multiples of 16, the rest beyond the vectors being zero.

#include <cstddef>
#include <cstdlib>
#include <memory>
#include <span>

namespace tarn::runtime {

/// Zeroed doubles on a 64-byte boundary; the length is rounded up to a multiple of 16.
class AlignedArray {
 public:
  AlignedArray() = default;
  explicit AlignedArray(std::size_t count);
  double* data() { return data_.get(); }
  const double* data() const { return data_.get(); }
  std::size_t size() const { return size_; }  ///< Rounded up.

 private:
  struct Free {
    void operator()(double* p) const { std::free(p); }
  };
  std::unique_ptr<double[], Free> data_;
  std::size_t size_ = 0;
};

/// At most this many vectors take part in one sweep.
inline constexpr std::size_t kMostVectors = 16;

/// out = sum_j weights[j lanes + l] vectors[j], lane by lane, summed in order of j.
/// `length` doubles; 1 <= vectors.size() <= kMostVectors. `out` may be one of the vectors.
void combine(std::size_t length, std::size_t lanes, std::span<const double* const> vectors,
             const double* weights, double* out);

/// result[l] = squared norm of lane l; the order of summation depends on length and lanes only.
void squares(std::size_t length, std::size_t lanes, const double* x, double* result);

/// Squared norms of two combinations of the same vectors in one sweep, lane by lane.
void combined_squares(std::size_t length, std::size_t lanes, std::span<const double* const> vectors,
                      const double* first_weights, const double* second_weights,
                      double* first_squares, double* second_squares);

/// Copies lane l of `from` to lane l of `to` for every l with take[l] set.
void copy_lanes(std::size_t length, std::size_t lanes, const bool* take, const double* from,
                double* to);

}  // namespace tarn::runtime
