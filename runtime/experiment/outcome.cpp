#include "runtime/experiment/outcome.h"

#include <algorithm>

namespace tarn::runtime {

bool reads_reduction(const Plan& plan, const Observable& observable) {
  return std::any_of(observable.readings.begin(), observable.readings.end(), [&](std::uint32_t row) {
    return std::holds_alternative<ReadReduction>(plan.readings[row]);
  });
}

Occurrence occurrence_of(const Plan& plan, const Observable& observable) {
  if (std::holds_alternative<Along>(observable.moment)) return Occurrence::trace;
  if (plan.scan && std::holds_alternative<Static>(observable.moment) && !reads_reduction(plan, observable)) {
    return Occurrence::scan;
  }
  return Occurrence::once;
}

}  // namespace tarn::runtime
