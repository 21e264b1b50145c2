#include "compiler/driver/landed.h"

#include <algorithm>

namespace tarn::compiler {
namespace {

/// Where the verdict is asked for: an observable's place, or the experiment's.
const Span* verdict_of(const Instance& instance) {
  const bool asked = std::any_of(instance.readings.begin(), instance.readings.end(),
                                 [](const ReadingI& reading) { return std::holds_alternative<VerdictI>(reading); });
  if (!asked) return nullptr;
  for (const ObservableI& observable : instance.observables) {
    if (observable.name == "verdict") return &observable.span;
  }
  return &instance.span;
}

}  // namespace

void refuse_not_landed(std::span<const Instance> instances, Diagnostics& diagnostics) {
  for (const Instance& instance : instances) {
    if (const Span* span = verdict_of(instance)) {
      diagnostics.report(*span, diag::not_available, "`verdict`", "`each of` with `hierarchy` for up to three qubits, and the conditions in lang/REFERENCE.md");
    }
    if (instance.trajectories) {
      diagnostics.report(instance.span, diag::not_available, "`trajectories`", "the density matrix, which every equation gives without it");
    }
    if (instance.levels_auto) diagnostics.report(instance.span, diag::not_available, "`levels auto`", "`levels K` with a number K");
  }
}

}  // namespace tarn::compiler
