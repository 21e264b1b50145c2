#include "runtime/equation/propagate.h"

#include <fmt/format.h>

#include <algorithm>
#include <complex>

namespace tarn::runtime {

double largest_coherence(const Density& rho) {
  double most = 0;
  for (Eigen::Index b = 0; b < rho.cols(); ++b) {
    for (Eigen::Index a = 0; a < b; ++a) most = std::max(most, std::abs(rho(a, b)));
  }
  return most;
}

RunError run_error(const Failure& failure) {
  switch (failure.kind) {
    case FailureKind::not_finite:
      return {"not_finite", fmt::format("the state or a coefficient is not finite at t = {:.6g} ns: check "
                                        "the schedules and parameters for a division by zero or an "
                                        "overflow there", failure.t)};
    case FailureKind::step_underflow:
      return {"step_underflow", fmt::format("no time step is short enough at t = {:.6g} ns: loosen the "
                                            "tolerance, or smooth what changes suddenly there", failure.t)};
    case FailureKind::interrupted:
      return {"interrupted", fmt::format("interrupted at t = {:.6g} ns", failure.t)};
  }
  return {"internal", "unknown failure of an integrator"};
}

}  // namespace tarn::runtime
