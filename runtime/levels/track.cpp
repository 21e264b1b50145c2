#include "runtime/levels/track.h"

#include <algorithm>
#include <array>
#include <complex>
#include <mutex>

#include "lang/support/check.h"
#include "runtime/levels/grid.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {

using Complex = std::complex<double>;

/// Each depth is made as a whole by the first thread that asks.
template <class Scalar>
struct Track<Scalar>::Refinements {
  std::array<std::once_flag, kMaxDepth + 1> made;
  std::array<std::vector<StepFrames<Scalar>>, kMaxDepth + 1> depth;
};

template <class Scalar>
Matrix<Scalar> coupling_elements(const LevelModel<Scalar>& model, std::size_t coupling, const Frame<Scalar>& frame) {
  return product<Scalar>(frame.vectors.adjoint(), model.coupling(coupling, frame.s, frame.vectors));
}

template <class Scalar>
StepFrames<Scalar> make_step(const LevelModel<Scalar>& model, const Frame<Scalar>& start, const Frame<Scalar>& end, double tolerance) {
  StepFrames<Scalar> step;
  step.middle = model.solve(0.5 * (start.s + end.s), start.energies.size());
  step.first = make_link<Scalar>(model, start, step.middle, tolerance);
  orient(step.middle, step.first);
  step.second = make_link<Scalar>(model, step.middle, end, tolerance);
  step.groups = frequency_groups(step.middle.energies, tolerance);
  if (is_simple(step.groups, start.energies.size())) return step;
  step.groups = shared_groups(step.groups, step.first.left_energies, tolerance);
  // A basis turned at the middle has other labels; the first link has already told them apart.
  if (step.second.left_basis.size() == 0) step.groups = shared_groups(step.groups, step.second.right_energies, tolerance);
  return step;
}

template <class Scalar>
Track<Scalar>::Track(LevelModel<Scalar> model, const TrackOptions& options) : model_(std::move(model)) {
  BaseGrid<Scalar> grid = base_grid<Scalar>(model_, options);
  levels_ = grid.levels;
  width_ = grid.width;
  resolved_ = grid.resolved;
  nodes_ = std::move(grid.nodes);
  for (const auto& frame : nodes_) energy_error_ = std::max(energy_error_, frame.residual);
  for (std::size_t i = 0; i < intervals(); ++i) refinements_.push_back(std::make_unique<Refinements>());
}

template <class Scalar>
Track<Scalar>::~Track() = default;

template <class Scalar>
const std::vector<StepFrames<Scalar>>& Track<Scalar>::steps(std::size_t interval, int depth) const {
  TARN_CHECK(depth >= 0 && depth <= kMaxDepth);
  Refinements& refinements = *refinements_[interval];
  const auto row = static_cast<std::size_t>(depth);
  std::call_once(refinements.made[row], [&] {
    const auto ends = frames(interval, depth);
    auto& steps = refinements.depth[row];
    steps.reserve(ends.size() - 1);
    for (std::size_t k = 0; k + 1 < ends.size(); ++k) steps.push_back(make_step<Scalar>(model_, *ends[k], *ends[k + 1], tolerance()));
  });
  return refinements.depth[row];
}

template <class Scalar>
std::vector<const Frame<Scalar>*> Track<Scalar>::frames(std::size_t interval, int depth) const {
  if (depth == 0) return {&nodes_[interval], &nodes_[interval + 1]};
  const auto coarse = frames(interval, depth - 1);
  const auto& middles = steps(interval, depth - 1);
  std::vector<const Frame<Scalar>*> fine;
  for (std::size_t k = 0; k < middles.size(); ++k) {
    fine.push_back(coarse[k]);
    fine.push_back(&middles[k].middle);
  }
  fine.push_back(coarse.back());
  return fine;
}

template <class Scalar>
std::size_t Track<Scalar>::interval_of(double s) const {
  const auto after = std::upper_bound(nodes_.begin(), nodes_.end(), s, [](double x, const auto& node) { return x < node.s; });
  const auto index = after - nodes_.begin() - 1;
  return static_cast<std::size_t>(std::clamp<std::ptrdiff_t>(index, 0, static_cast<std::ptrdiff_t>(intervals()) - 1));
}

template Matrix<double> coupling_elements<double>(const LevelModel<double>&, std::size_t, const Frame<double>&);
template Matrix<Complex> coupling_elements<Complex>(const LevelModel<Complex>&, std::size_t, const Frame<Complex>&);
template StepFrames<double> make_step<double>(const LevelModel<double>&, const Frame<double>&, const Frame<double>&, double);
template StepFrames<Complex> make_step<Complex>(const LevelModel<Complex>&, const Frame<Complex>&, const Frame<Complex>&, double);
template class Track<double>;
template class Track<Complex>;

}  // namespace tarn::runtime
