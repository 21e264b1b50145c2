#include "runtime/equation/propagate.h"

#include <fmt/format.h>

namespace tarn::runtime {

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
