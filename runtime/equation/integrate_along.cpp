#include "runtime/equation/integrate_along.h"

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"
#include "runtime/equation/propagate_pieces.h"

namespace tarn::runtime {
namespace {

/// argument = sum_j weights[j] vectors[j], then its derivative.
RightHandSide side_of(const SteppedEquation& equation, const std::vector<Piece>& pieces, std::size_t length) {
  const auto nodes = [&](const Nodes& at, bool* bad) {
    const Piece& piece = pieces[std::min(at.piece[0], pieces.size() - 1)];
    for (std::size_t node = 0; node < at.count; ++node)
      if (!equation.prepare(node, piece.s_at(at.t[node]), at.t[node])) bad[0] = true;
  };
  const auto stage = [&, length](std::size_t node, std::size_t count, const double* weights,
                                 const double* const* vectors, double* argument, double* derivative) {
    combine(length, 1, {vectors, count}, weights, argument);
    equation.derivative(node, argument, derivative);
  };
  return {nodes, stage};
}

}  // namespace

std::optional<Failure> integrate_along(const SteppedEquation& equation, const MemoryRun& run, bool reads_t,
                                       std::span<const double> initial, const OnState& on_state,
                                       const Interrupted& interrupted, Counters& counters) {
  const Timeline& timeline = *run.timeline;
  std::vector<double> times;
  for (const double t : run.times) times.push_back(std::clamp(t, 0.0, timeline.duration()));
  TARN_CHECK(std::is_sorted(times.begin(), times.end()));
  const std::vector<Piece> pieces = cut_pieces(timeline, run.breaks, reads_t);
  AlignedArray start(initial.size());
  std::copy(initial.begin(), initial.end(), start.data());
  if (pieces.empty()) {
    for (std::size_t k = 0; k < times.size(); ++k) on_state(k, start.data());
    return std::nullopt;
  }
  std::vector<double> boundaries;
  for (const Piece& piece : pieces) boundaries.push_back(piece.t0);
  boundaries.push_back(pieces.back().t1);
  const LaneTask task{boundaries, times, run.tolerance, timeline.duration()};
  const OnTime on_time = [&](std::size_t, std::size_t index, const double* y) { on_state(index, y); };
  ExplicitIntegrator integrator(initial.size(), 1);
  std::copy(initial.begin(), initial.end(), integrator.state());
  const auto failures = integrator.run(side_of(equation, pieces, start.size()), {&task, 1}, on_time, interrupted);
  counters += integrator.counters(0);
  return failures.front();
}

}  // namespace tarn::runtime
