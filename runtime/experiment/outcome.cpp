#include "runtime/experiment/outcome.h"

#include <algorithm>

namespace tarn::runtime {

namespace {

/// True if the observable is the same at every s of a scan: made of reductions and parameters.
bool reads_reductions_only(const Plan& plan, const Observable& observable) {
  return reads_reduction(plan, observable) && !observable.reads_s &&
         std::all_of(observable.readings.begin(), observable.readings.end(), [&](std::uint32_t row) {
           return std::holds_alternative<ReadReduction>(plan.readings[row]);
         });
}

}  // namespace

bool reads_reduction(const Plan& plan, const Observable& observable) {
  return std::any_of(observable.readings.begin(), observable.readings.end(), [&](std::uint32_t row) {
    return std::holds_alternative<ReadReduction>(plan.readings[row]);
  });
}

Occurrence occurrence_of(const Plan& plan, const Observable& observable) {
  if (std::holds_alternative<Along>(observable.moment)) return Occurrence::trace;
  if (plan.scan && std::holds_alternative<Static>(observable.moment) && !reads_reductions_only(plan, observable)) {
    return Occurrence::scan;
  }
  return Occurrence::once;
}

}  // namespace tarn::runtime
