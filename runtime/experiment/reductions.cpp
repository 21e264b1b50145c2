#include "runtime/experiment/reductions.h"

#include <algorithm>
#include <cmath>
#include <memory>

#include "runtime/experiment/tables.h"

namespace tarn::runtime {
namespace {

const ReadReduction* reduction(const Plan& plan, std::uint32_t reading) {
  return std::get_if<ReadReduction>(&plan.readings[reading]);
}

bool ready(const Plan& plan, const Observable& observable, const PointOutcome& outcome) {
  return std::all_of(observable.readings.begin(), observable.readings.end(), [&](std::uint32_t r) {
    const ReadReduction* read = reduction(plan, r);
    return read == nullptr || !outcome.series[read->observable].empty();
  });
}

Answer answer_of(const Plan& plan, Functions& functions, std::uint32_t o, Instant at, std::vector<Measured> readings,
                 const PointOutcome& outcome) {
  const Observable& observable = plan.observables[o];
  for (const std::uint32_t r : observable.readings) {
    if (const ReadReduction* read = reduction(plan, r)) {
      const Answer reduced = reduce_series(read->over, outcome.series[read->observable]);
      readings[r] = {reduced.value, reduced.error};
    }
  }
  const std::vector<double> no_norms(plan.readings.size(), 0.0);
  const Snapshot snapshot{std::move(readings), {}, {}};
  return estimate_answer(snapshot, {}, 0, observable_rows(plan, functions, at), observable.row, observable.readings,
                         no_norms);
}

Sample sample_of(const Plan& plan, const Observable& observable, Instant at, Answer answer) {
  const bool once = occurrence_of(plan, observable) == Occurrence::once;
  return {once ? Instant{0, 0} : at, answer};
}

}  // namespace

ObservableRows observable_rows(const Plan& plan, Functions& functions, Instant at) {
  return [&plan, &functions, at](std::span<const double> readings) {
    for (std::size_t r = 0; r < readings.size(); ++r) {
      functions.set_input(plan.reading_slot + static_cast<std::uint32_t>(r), readings[r]);
    }
    return functions.values(kObservables, at.s, at.t);
  };
}

void complete_reductions(const Plan& plan, Functions& functions, std::vector<Waiting> waiting, PointOutcome& outcome) {
  while (!waiting.empty()) {
    const auto next = std::find_if(waiting.begin(), waiting.end(), [&](const Waiting& w) {
      return ready(plan, plan.observables[w.observable], outcome);
    });
    if (next == waiting.end()) return;
    const Observable& observable = plan.observables[next->observable];
    for (std::size_t k = 0; k < next->instants.size(); ++k) {
      const Instant at = next->instants[k];
      const Answer answer = answer_of(plan, functions, next->observable, at, next->readings[k], outcome);
      outcome.series[next->observable].push_back(sample_of(plan, observable, at, answer));
    }
    round_to_shown(plan, outcome);
    waiting.erase(next);
  }
}

bool complete_unlisted(const Plan& plan, Functions& functions, PointOutcome& outcome) {
  if (outcome.error) return true;
  std::vector<Waiting> waiting;
  for (std::uint32_t o = 0; o < plan.observables.size(); ++o) {
    if (!outcome.series[o].empty()) continue;
    const Observable& observable = plan.observables[o];
    if (occurrence_of(plan, observable) != Occurrence::once) return false;
    const bool reductions_only =
        std::all_of(observable.readings.begin(), observable.readings.end(),
                    [&](std::uint32_t r) { return reduction(plan, r) != nullptr; });
    if (!reductions_only || observable.readings.empty()) return false;
    waiting.push_back({o, {Instant{0, 0}}, {std::vector<Measured>(plan.readings.size())}});
  }
  complete_reductions(plan, functions, std::move(waiting), outcome);
  return std::none_of(outcome.series.begin(), outcome.series.end(), [](const auto& series) { return series.empty(); });
}

}  // namespace tarn::runtime
