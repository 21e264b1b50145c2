#include "runtime/equation/lindblad.h"

#include "lang/support/check.h"

namespace tarn::runtime {

std::vector<Result<Counters, RunError>> propagate_lindblad_lanes(
    const Entries& entries, const tarn_block& block, std::span<const LinearRun> runs,
    std::span<const Density> initial, std::span<const Visit> visits, const Interrupted& interrupted) {
  TARN_CHECK(runs.size() == initial.size() && runs.size() == visits.size());
  TARN_CHECK(entries.bits % 2 == 0);
  const Eigen::Index levels = Eigen::Index{1} << (entries.bits / 2);
  const std::size_t width = entries.lanes;
  const auto place = [&](Eigen::Index row, Eigen::Index column) {
    return 2 * static_cast<std::size_t>(row * levels + column) * width;
  };
  std::vector<double> start(place(levels, 0), 0.0);
  for (std::size_t l = 0; l < runs.size(); ++l) {
    TARN_CHECK(initial[l].rows() == levels && initial[l].cols() == levels);
    for (Eigen::Index row = 0; row < levels; ++row)
      for (Eigen::Index column = 0; column < levels; ++column) {
        start[place(row, column) + l] = initial[l](row, column).real();
        start[place(row, column) + width + l] = initial[l](row, column).imag();
      }
  }
  State state = Density(levels, levels);
  Density& rho = std::get<Density>(state);
  const auto on_time = [&](std::size_t l, std::size_t index, const double* y) {
    for (Eigen::Index row = 0; row < levels; ++row)
      for (Eigen::Index column = 0; column < levels; ++column)
        rho(row, column) = {y[place(row, column) + l], y[place(row, column) + width + l]};
    visits[l](index, state);
  };
  std::vector<Result<Counters, RunError>> results;
  for (const LinearOutcome& outcome :
       propagate_linear(entries, block, Flow::damped, runs, start, on_time, interrupted)) {
    if (outcome.failure) results.push_back(Unexpected{run_error(*outcome.failure)});
    else results.push_back(outcome.counters);
  }
  return results;
}

Result<Counters, RunError> propagate_lindblad(const Entries& entries, const tarn_block& block,
                                              const LinearRun& run, const Density& initial,
                                              const Visit& visit, const Interrupted& interrupted) {
  TARN_CHECK(entries.lanes == 1);
  return propagate_lindblad_lanes(entries, block, {&run, 1}, {&initial, 1}, {&visit, 1}, interrupted)
      .front();
}

}  // namespace tarn::runtime
