#pragma once
/// \file Why an integration stopped early, and the question whether it should.

#include <cstdint>
#include <functional>

namespace tarn::runtime {

/// not_finite: the state or a coefficient is NaN or infinite at `t`. step_underflow: no step that
/// the clock can resolve meets the tolerance at `t`.
enum class FailureKind : std::uint8_t { not_finite, step_underflow, interrupted };

struct Failure {
  FailureKind kind = FailureKind::not_finite;
  double t = 0;  ///< [ns]
};

/// Returns true when the work should stop; asked about every 0.1 s or less.
using Interrupted = std::function<bool()>;

}  // namespace tarn::runtime
