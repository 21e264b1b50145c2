#pragma once
/// \file exp(h G) x for a large generator whose spectrum lies near an interval of the imaginary axis,
/// with four vectors and only products G x.
///
/// With exp(-i h H) = exp(-i h c) sum_k (2 - [k = 0]) (-i)^k J_k(h r) T_k((H - c) / r), H = i G and
/// [c - r, c + r] around its spectrum, the terms fall faster than exponentially beyond k = h r.
/// A weakly damped G makes the terms grow by about exp(h damping), which is watched.
/// Source: J. Chem. Phys. 81, 3967 (1984).

#include <cstddef>
#include <functional>
#include <optional>

#include "runtime/integrate/counters.h"
#include "runtime/integrate/failure.h"
#include "runtime/integrate/vectors.h"

namespace tarn::runtime {

/// y = G x on `size` doubles, pairs of real and imaginary part. Linear over the complex numbers.
using Product = std::function<void(const double* x, double* y)>;

/// Where the spectrum of i G is thought to lie [rad/ns].
struct Interval {
  double centre = 0, radius = 0;
};

/// The interval from `steps` Lanczos steps, with the residuals added; a little too small at times,
/// which ChebyshevExponential notices. Counts its products.
Interval estimate_spectrum(const Product& g, std::size_t size, std::size_t steps, Counters& counters);

class ChebyshevExponential {
 public:
  /// `size` doubles.
  explicit ChebyshevExponential(std::size_t size);

  /// x = exp(h G) x, h >= 0, in as few pieces as the damping allows; the error in the 2-norm is about
  /// `tolerance` |x|, not below rounding, h r 1e-16. Widens `interval` where terms show that it is too
  /// small. Error: not_finite (t is then the time done), interrupted.
  std::optional<Failure> advance(const Product& g, double h, double tolerance, Interval& interval,
                                 double* x, Counters& counters, const Interrupted& interrupted);

 private:
  enum class Outcome { done, grew, not_finite, interrupted };
  Outcome attempt(const Product& g, double h, double tolerance, const Interval& interval,
                  const double* x, Counters& counters, const Interrupted& interrupted);

  std::size_t size_;
  AlignedArray before_, now_, product_, sum_;
};

}  // namespace tarn::runtime
