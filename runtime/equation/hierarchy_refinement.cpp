#include "runtime/equation/hierarchy_refinement.h"

#include <algorithm>
#include <fmt/format.h>

#include "lang/support/check.h"
#include "runtime/equation/hierarchy_steady.h"

namespace tarn::runtime {
namespace {

/// Errors of a run are a few tolerances of a step: see runtime/integrate/explicit.h.
constexpr double kOfTolerance = 10;
/// The measures of two sums compare their errors to within this.
constexpr double kOfRatio = 2;

/// How much better the sums are than the coarser ones, the worst of all baths; at most 1.
double error_ratio(const std::vector<ExponentialSum>& baths, const std::vector<ExponentialSum>& coarser) {
  double ratio = 0;
  for (std::size_t c = 0; c < coarser.size(); ++c)
    if (baths[c].error > 0) ratio = std::max(ratio, coarser[c].error > 0 ? baths[c].error / coarser[c].error : 1.0);
  return std::min(1.0, kOfRatio * ratio);
}

}  // namespace

HierarchyRefinement::HierarchyRefinement(OpenSystem system, HierarchyRun run, HierarchyOptions options)
    : system_(std::move(system)), run_(std::move(run)), options_(std::move(options)) {
  TARN_CHECK(options_.coarser_baths.empty() || options_.coarser_baths.size() == system_.baths.size());
  depth_ = options_.depth.value_or(options_.first_depth);
  TARN_CHECK(depth_ >= 1);
  if (options_.coarser_baths.empty()) return;
  coarser_system_ = system_;
  coarser_system_.baths = options_.coarser_baths;
  ratio_ = error_ratio(system_.baths, options_.coarser_baths);
}

Result<std::vector<Density>, RunError> HierarchyRefinement::states_of(const OpenSystem& system, int depth,
                                                                      Counters& counters) const {
  HierarchyStart start = run_.initial.value_or(Density());
  if (!run_.initial) {
    const double s = run_.timeline.segments.empty() ? run_.timeline.first_s : run_.timeline.segments.front().s0;
    auto stationary = stationary_hierarchy(system, depth, s, options_.tolerance, options_.interrupted);
    if (!stationary) return Unexpected{stationary.error()};
    counters += stationary->counters;
    start = std::move(stationary->state);
  }
  const MemoryRun run{&run_.timeline, run_.breaks, run_.times, options_.tolerance};
  std::vector<Density> states(run_.times.size());
  const Visit visit = [&](std::size_t index, const State& state) { states[index] = std::get<Density>(state); };
  const auto made = propagate_hierarchy(system, depth, run, start, visit, options_.interrupted);
  if (!made) return Unexpected{made.error()};
  counters += *made;
  return states;
}

Result<HierarchyAnswer, RunError> HierarchyRefinement::next() {
  TARN_CHECK(!exhausted_);
  HierarchyAnswer answer;
  const double bytes = hierarchy_bytes(system_, depth_);
  if (bytes > options_.max_bytes)
    return Unexpected{RunError{"too_large", fmt::format("a hierarchy of depth {} takes {:.3g} MB, {:.3g} MB are left: use fewer "
                                                        "exponentials, a smaller depth or fewer jobs at a time",
                                                        depth_, bytes / 1e6, options_.max_bytes / 1e6)}};
  if (last_.empty()) {
    auto coarser = states_of(system_, depth_ - 1, answer.counters);
    if (!coarser) return Unexpected{coarser.error()};
    last_ = *std::move(coarser);
  }
  auto states = states_of(system_, depth_, answer.counters);
  if (!states) return Unexpected{states.error()};
  answer.states = *std::move(states);
  answer.coarser.push_back({std::move(last_), 1});
  last_ = answer.states;
  if (!options_.coarser_baths.empty() && ratio_ > 0) {
    auto coarser = states_of(coarser_system_, depth_, answer.counters);
    if (!coarser) return Unexpected{coarser.error()};
    answer.coarser.push_back({*std::move(coarser), ratio_});
  }
  answer.floor = kOfTolerance * options_.tolerance;
  answer.depth = depth_;
  ++depth_;
  exhausted_ = options_.depth || depth_ > options_.last_depth || hierarchy_bytes(system_, depth_) > options_.max_bytes ||
               too_large_hierarchy(system_, depth_);
  return answer;
}

}  // namespace tarn::runtime
