#pragma once
/// \file How much memory the points of a plan take while they run, and how much there is.

#include <cstddef>
#include <optional>

#include "runtime/plan/plan.h"

namespace tarn::runtime {

/// Bytes of the largest arrays, by what the integrators hold. One closed run of 18 qubits took 1.5 times
/// as much; Lindblad and Davies were not measured. A run that needs more than there is would be ended by
/// the system, and its answers with it.
struct MemoryNeed {
  double common = 0;    ///< Once a run, however many points go at a time.
  double each_job = 0;  ///< For each group of points under way.
};

/// `lanes` is how many points go together in one job.
MemoryNeed memory_needed(const Plan& plan, std::size_t lanes);

/// Bytes that this process may still take without the system running short; none if it does not tell.
std::optional<double> memory_available();

/// The most jobs, `asked` at most, that fit into `available` bytes; 0 if not even one does.
std::size_t jobs_that_fit(const MemoryNeed& need, std::size_t asked, double available);

}  // namespace tarn::runtime
