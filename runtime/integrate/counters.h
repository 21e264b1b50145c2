#pragma once
/// \file What a propagation did, as counts that tests can bound.

#include <cstdint>

namespace tarn::runtime {

/// Summed over points and shown in run.json. `evaluations` counts products of a generator and a
/// vector, those inside exponentials included.
struct Counters {
  std::uint64_t steps = 0, rejected = 0, evaluations = 0, exponentials = 0, decompositions = 0;
  Counters& operator+=(const Counters& other) {
    steps += other.steps;
    rejected += other.rejected;
    evaluations += other.evaluations;
    exponentials += other.exponentials;
    decompositions += other.decompositions;
    return *this;
  }
};

}  // namespace tarn::runtime
