#include "runtime/equation/schroedinger.h"

#include "lang/support/check.h"

namespace tarn::runtime {

std::vector<Result<Counters, RunError>> propagate_schroedinger_lanes(
    const Entries& entries, const tarn_block& block, std::span<const LinearRun> runs,
    std::span<const Ket> initial, std::span<const Visit> visits, const Interrupted& interrupted) {
  TARN_CHECK(runs.size() == initial.size() && runs.size() == visits.size());
  const std::size_t amplitudes = std::size_t{1} << entries.bits, width = entries.lanes;
  std::vector<double> start(2 * amplitudes * width, 0.0);
  for (std::size_t l = 0; l < runs.size(); ++l) {
    TARN_CHECK(static_cast<std::size_t>(initial[l].size()) == amplitudes);
    for (std::size_t i = 0; i < amplitudes; ++i) {
      const auto& amplitude = initial[l][static_cast<Eigen::Index>(i)];
      start[2 * i * width + l] = amplitude.real();
      start[(2 * i + 1) * width + l] = amplitude.imag();
    }
  }
  State state = Ket(static_cast<Eigen::Index>(amplitudes));
  Ket& psi = std::get<Ket>(state);
  const auto on_time = [&](std::size_t l, std::size_t index, const double* y) {
    for (std::size_t i = 0; i < amplitudes; ++i)
      psi[static_cast<Eigen::Index>(i)] = {y[2 * i * width + l], y[(2 * i + 1) * width + l]};
    visits[l](index, state);
  };
  std::vector<Result<Counters, RunError>> results;
  for (const LinearOutcome& outcome :
       propagate_linear(entries, block, Flow::skew, runs, start, on_time, interrupted)) {
    if (outcome.failure) results.push_back(Unexpected{run_error(*outcome.failure)});
    else results.push_back(outcome.counters);
  }
  return results;
}

Result<Counters, RunError> propagate_schroedinger(const Entries& entries, const tarn_block& block,
                                                  const LinearRun& run, const Ket& initial,
                                                  const Visit& visit, const Interrupted& interrupted) {
  TARN_CHECK(entries.lanes == 1);
  return propagate_schroedinger_lanes(entries, block, {&run, 1}, {&initial, 1}, {&visit, 1}, interrupted)
      .front();
}

}  // namespace tarn::runtime
