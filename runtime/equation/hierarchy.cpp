#include "runtime/equation/hierarchy.h"

#include <algorithm>
#include <fmt/format.h>

#include "lang/support/check.h"
#include "runtime/equation/integrate_along.h"

namespace tarn::runtime {
namespace {

/// Links are numbered by 32 bits.
constexpr double kMostLinks = 0x1p32;

std::vector<double> start_of(const HierarchyStart& initial, int depth, std::size_t size) {
  if (const auto* state = std::get_if<HierarchyState>(&initial)) {
    TARN_CHECK(state->depth == depth && state->blocks.size() == size);
    return state->blocks;
  }
  std::vector<double> start(size, 0.0);
  store_block(std::get<Density>(initial), start.data());
  return start;
}

}  // namespace

HierarchyEquation::HierarchyEquation(const OpenSystem& system, int depth)
    : system_(system), hamiltonian_(system.dimension, system.dimension),
      couplings_(system.couplings.size(), Eigen::MatrixXcd(system.dimension, system.dimension)) {
  TARN_CHECK(system.couplings.size() == system.baths.size());
  indices_ = hierarchy_indices(hierarchy_modes(system.baths), system.couplings.size(), depth);
  size_ = indices_.count * static_cast<std::size_t>(2 * system.dimension * system.dimension);
  for (const ExponentialSum& bath : system.baths) rests_.push_back(bath.rest);
  for (std::size_t c = 0; c < couplings_.size(); ++c)
    if (system.couplings[c].constant) system.couplings[c].at(0, couplings_[c]);
}

bool HierarchyEquation::prepare(std::size_t node, double s, double t) {
  if (node >= nodes_.size()) nodes_.resize(node + 1);
  system_.hamiltonian(s, t, hamiltonian_);
  bool finite = hamiltonian_.allFinite();
  for (std::size_t c = 0; c < couplings_.size(); ++c) {
    if (!system_.couplings[c].constant) system_.couplings[c].at(s, couplings_[c]);
    finite = finite && couplings_[c].allFinite();
  }
  set_operators(hamiltonian_, couplings_, rests_, system_.jumps, nodes_[node]);
  return finite;
}

void HierarchyEquation::derivative(std::size_t node, const double* x, double* d) const {
  hierarchy_sweep(system_.dimension, indices_, nodes_[node], x, d);
}

double hierarchy_bytes(const OpenSystem& system, int depth) {
  constexpr double kVectors = 21;  // Of the integrator, 19; where the run starts, twice.
  const std::size_t modes = hierarchy_modes(system.baths).size(), couplings = system.couplings.size();
  const double count = hierarchy_count(modes, depth), block = 2.0 * static_cast<double>(system.dimension * system.dimension);
  const double links = 2 * static_cast<double>(modes) * (depth > 0 ? hierarchy_count(modes, depth - 1) : 0);
  return 8 * (kVectors * count * block + links) + count * (16 + 8 * static_cast<double>(couplings));
}

std::optional<RunError> too_large_hierarchy(const OpenSystem& system, int depth) {
  const std::size_t modes = hierarchy_modes(system.baths).size();
  const double count = hierarchy_count(modes, depth);
  if (2 * count * static_cast<double>(modes + system.couplings.size()) < kMostLinks) return std::nullopt;
  return RunError{"too_large", fmt::format("a hierarchy of depth {} with {} exponentials has {:.3g} matrices, more than can be "
                                           "numbered: use fewer exponentials or a smaller depth",
                                           depth, modes, count)};
}

Result<Counters, RunError> propagate_hierarchy(const OpenSystem& system, int depth, const MemoryRun& run,
                                               const HierarchyStart& initial, const Visit& visit,
                                               const Interrupted& interrupted) {
  if (const auto error = too_large_hierarchy(system, depth)) return Unexpected{*error};
  HierarchyEquation hierarchy(system, depth);
  const SteppedEquation equation{[&](std::size_t node, double s, double t) { return hierarchy.prepare(node, s, t); },
                                 [&](std::size_t node, const double* x, double* d) { hierarchy.derivative(node, x, d); }};
  State state = Density(system.dimension, system.dimension);
  const OnState on_state = [&](std::size_t index, const double* x) {
    std::get<Density>(state) = matrix_of_block(system.dimension, x);
    visit(index, state);
  };
  Counters counters;
  const auto failure = integrate_along(equation, run, system.reads_t, start_of(initial, depth, hierarchy.size()), on_state,
                                       interrupted, counters);
  if (failure) return Unexpected{run_error(*failure)};
  return counters;
}

}  // namespace tarn::runtime
