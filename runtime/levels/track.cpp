#include "runtime/levels/track.h"

#include <algorithm>
#include <complex>

#include "lang/support/check.h"
#include "runtime/levels/grid.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {

using Complex = std::complex<double>;

namespace {

template <class Scalar>
std::size_t bytes_of(const Link<Scalar>& link) {
  const Eigen::Index matrices = link.left_basis.size() + link.right_basis.size() + link.rotation.size();
  return static_cast<std::size_t>(matrices) * sizeof(Scalar) + static_cast<std::size_t>(6 * link.lost.size()) * sizeof(double);
}

template <class Scalar>
std::size_t bytes_of(const Steps<Scalar>& steps) {
  std::size_t sum = 0;
  for (const auto& step : steps) {
    sum += sizeof step + static_cast<std::size_t>(step.middle.vectors.size()) * sizeof(Scalar);
    sum += bytes_of(step.first) + bytes_of(step.second) + (step.groups.order.size() + step.groups.start.size()) * sizeof(std::uint32_t);
  }
  return sum;
}

}  // namespace

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
Track<Scalar>::Track(LevelModel<Scalar> model, const TrackOptions& options)
    : model_(std::move(model)) {
  BaseGrid<Scalar> grid = base_grid<Scalar>(model_, options);
  levels_ = grid.levels;
  width_ = grid.width;
  resolved_ = grid.resolved;
  nodes_ = std::move(grid.nodes);
  for (const auto& frame : nodes_) energy_error_ = std::max(energy_error_, frame.residual);
  for (std::size_t i = 0; i < intervals(); ++i) refinements_.push_back(std::make_unique<Refinements>(options.memory));
}

template <class Scalar>
Stretch<Scalar> Track<Scalar>::stretch(std::size_t interval, int depth, const std::function<bool()>& interrupted) const {
  TARN_CHECK(depth >= 0 && depth <= kMaxDepth);
  Stretch<Scalar> stretch;
  if (depth == 0) {
    stretch.frames = {&nodes_[interval], &nodes_[interval + 1]};
  } else {
    Stretch<Scalar> coarse = this->stretch(interval, depth - 1, interrupted);
    if (!coarse.steps) return coarse;
    for (std::size_t k = 0; k < coarse.steps->size(); ++k) {
      stretch.frames.push_back(coarse.frames[k]);
      stretch.frames.push_back(&(*coarse.steps)[k].middle);
    }
    stretch.frames.push_back(coarse.frames.back());
    stretch.owners = std::move(coarse.owners);
    stretch.owners.push_back(std::move(coarse.steps));
  }
  stretch.steps = refinements_[interval]->get(
      depth, [&] { return make_steps(stretch, interrupted); }, [](const Steps<Scalar>& steps) { return bytes_of(steps); });
  return stretch;
}

template <class Scalar>
std::optional<Steps<Scalar>> Track<Scalar>::make_steps(const Stretch<Scalar>& stretch, const std::function<bool()>& interrupted) const {
  Steps<Scalar> steps;
  steps.reserve(stretch.frames.size() - 1);
  for (std::size_t k = 0; k + 1 < stretch.frames.size(); ++k) {
    if (interrupted && interrupted()) return std::nullopt;
    steps.push_back(make_step<Scalar>(model_, *stretch.frames[k], *stretch.frames[k + 1], tolerance()));
  }
  return steps;
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
