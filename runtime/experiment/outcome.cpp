#include "runtime/experiment/outcome.h"

#include <algorithm>
#include <cmath>

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

bool names_moment(const Observable& observable) {
  return std::holds_alternative<AtTime>(observable.moment) || std::holds_alternative<AtS>(observable.moment);
}

bool lacks_value(const std::vector<Sample>& series) {
  return series.empty() || (series.size() == 1 && std::isnan(series.front().answer.value));
}

std::uint32_t choice_of(const Plan& plan) {
  for (std::uint32_t c = 0; c < plan.compared.size(); ++c) {
    if (plan.compared[c].label == plan.choice.label) return c;
  }
  return 0;
}

std::uint64_t row_of(const Plan& plan, std::uint64_t index, std::uint32_t choice) {
  return index * std::max<std::size_t>(1, plan.compared.size()) + choice;
}

Occurrence occurrence_of(const Plan& plan, const Observable& observable) {
  if (std::holds_alternative<Along>(observable.moment)) return Occurrence::trace;
  if (plan.scan && std::holds_alternative<Static>(observable.moment) && !reads_reductions_only(plan, observable)) {
    return Occurrence::scan;
  }
  return Occurrence::once;
}

}  // namespace tarn::runtime
