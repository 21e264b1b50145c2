#include "runtime/levels/grid.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <iterator>
#include <optional>

#include "lang/support/check.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

constexpr double kExactGap = 1e-10;     ///< Of the width: a smaller gap counts as a true crossing.
constexpr double kShortest = 1e-12;     ///< Of the range of s.
constexpr std::size_t kMaxWindows = 8;
constexpr double kShortWindow = 1e-6;   ///< Of the range: a shorter coincidence is passed over.

std::vector<double> initial_nodes(const std::vector<double>& breaks, const TrackOptions& options) {
  std::vector<double> fixed{options.s_min, options.s_max};
  for (const double s : breaks)
    if (s > options.s_min && s < options.s_max) fixed.push_back(s);
  std::sort(fixed.begin(), fixed.end());
  fixed.erase(std::unique(fixed.begin(), fixed.end()), fixed.end());
  std::vector<double> nodes{fixed.front()};
  const double range = options.s_max - options.s_min;
  for (std::size_t k = 1; k < fixed.size(); ++k) {
    const double length = fixed[k] - fixed[k - 1];
    const int pieces = std::max(1, static_cast<int>(std::ceil(length / range * options.initial_intervals - 1e-9)));
    for (int p = 1; p < pieces; ++p) nodes.push_back(fixed[k - 1] + length * p / pieces);
    nodes.push_back(fixed[k]);
  }
  return nodes;
}

template <class Scalar>
class Builder {
 public:
  Builder(const LevelModel<Scalar>& model, const TrackOptions& options)
      : model_(model), options_(options), range_(options.s_max - options.s_min) {}

  BaseGrid<Scalar> build() {
    grid_.levels = options_.levels == 0 ? model_.dimension : std::min(options_.levels, model_.dimension);
    while (!try_levels()) ++grid_.levels;
    place_group_boundaries();
    orient_all();
    return std::move(grid_);
  }

 private:
  double tolerance() const { return 1e-8 * grid_.width; }
  bool stopped() const { return options_.interrupted && options_.interrupted(); }
  Frame<Scalar> solve(double s) const { return model_.solve(s, grid_.levels); }
  static bool cuts_manifold(const Frame<Scalar>& frame, double tolerance) {
    return frame.next - frame.energies[frame.energies.size() - 1] <= tolerance;
  }

  /// False if the cut falls into a manifold somewhere.
  bool try_levels() {
    std::vector<Frame<Scalar>> start;
    grid_.width = 0;
    for (const double s : initial_nodes(model_.breaks, options_)) {
      if (stopped() && s != options_.s_min && s != options_.s_max) continue;
      start.push_back(solve(s));
      const auto& energies = start.back().energies;
      grid_.width = std::max(grid_.width, energies[energies.size() - 1] - energies[0]);
    }
    grid_.nodes.clear();
    grid_.nodes.push_back(start.front());
    for (std::size_t k = 1; k < start.size(); ++k) subdivide(start[k]);
    return std::none_of(grid_.nodes.begin(), grid_.nodes.end(),
                        [&](const auto& frame) { return cuts_manifold(frame, tolerance()); });
  }

  /// Appends nodes up to and including `end`, bisecting from the last node there is.
  void subdivide(Frame<Scalar> end) {
    std::vector<Frame<Scalar>> ahead;
    ahead.push_back(std::move(end));
    while (!ahead.empty()) {
      const Frame<Scalar>& left = grid_.nodes.back();
      const double s_left = left.s, s_right = ahead.back().s;
      const bool ends = stopped();
      const bool full = ends || grid_.nodes.size() + ahead.size() > static_cast<std::size_t>(options_.max_intervals);
      const bool coarse = ends || too_coarse(left, ahead.back());
      if (coarse && full) grid_.resolved = false;
      if (coarse && !full && s_right - s_left > kShortest * range_) {
        ahead.push_back(solve(0.5 * (s_left + s_right)));
      } else {
        grid_.nodes.push_back(std::move(ahead.back()));
        ahead.pop_back();
      }
    }
  }

  bool too_coarse(const Frame<Scalar>& left, const Frame<Scalar>& right) const {
    const Link<Scalar> link = make_link<Scalar>(model_, left, right, tolerance());
    const double close = tolerance();
    const Eigen::Index size = link.rotation.rows();
    std::vector<std::pair<Eigen::Index, Eigen::Index>> swaps;
    for (Eigen::Index b = 0; b < size; ++b)
      for (Eigen::Index a = 0; a < b; ++a) {
        const double before = link.left_energies[a] - link.left_energies[b];
        const double after = link.right_energies[a] - link.right_energies[b];
        if (std::abs(before) <= close && std::abs(after) <= close) continue;
        if (std::abs(link.rotation(a, b)) > options_.max_rotation) return true;
        if (std::min(std::abs(before), std::abs(after)) > close && before * after < 0) swaps.emplace_back(a, b);
      }
    return !swaps.empty() && (avoided(left, link.left_basis, link.left_energies, swaps, link.s_left) ||
                              avoided(right, link.right_basis, link.right_energies, swaps, link.s_right));
  }

  /// Whether one of the pairs has a gap where it crosses, judged by two levels from this side.
  bool avoided(const Frame<Scalar>& frame, const Matrix<Scalar>& basis, const Eigen::VectorXd& energies,
               const std::vector<std::pair<Eigen::Index, Eigen::Index>>& pairs, double s) const {
    Matrix<Scalar> vectors = frame.vectors;
    if (basis.size() != 0) vectors = product<Scalar>(frame.vectors, basis);
    const Matrix<Scalar> slope = product<Scalar>(vectors.adjoint(), model_.slope(s, vectors));
    return std::any_of(pairs.begin(), pairs.end(), [&](const auto& pair) {
      const auto [a, b] = pair;
      const double approach = std::abs(std::real(slope(a, a)) - std::real(slope(b, b)));
      return 2.0 * std::abs(slope(a, b)) * std::abs(energies[a] - energies[b]) > kExactGap * grid_.width * approach;
    });
  }

  void place_group_boundaries() {
    std::vector<Frame<Scalar>> coarse;
    coarse.swap(grid_.nodes);
    for (std::size_t k = 0; k < coarse.size(); ++k) {
      if (k > 0) {
        auto from_left = windows(coarse[k - 1], coarse[k]);
        auto from_right = windows(coarse[k], coarse[k - 1]);
        const double reached = from_left.empty() ? coarse[k - 1].s : from_left.back().s;
        std::erase_if(from_right, [&](const auto& frame) { return frame.s <= reached; });
        std::move(from_left.begin(), from_left.end(), std::back_inserter(grid_.nodes));
        std::move(from_right.rbegin(), from_right.rend(), std::back_inserter(grid_.nodes));
      }
      grid_.nodes.push_back(coarse[k]);
    }
  }

  /// The ends of nested windows (below) from `node` on, at most kMaxWindows of them.
  std::vector<Frame<Scalar>> windows(const Frame<Scalar>& node, const Frame<Scalar>& other) const {
    std::vector<Frame<Scalar>> ends;
    while (ends.size() < kMaxWindows) {
      auto end = window(ends.empty() ? node : ends.back(), other);
      if (!end) break;
      ends.push_back(std::move(*end));
    }
    return ends;
  }

  std::size_t shared(const Frame<Scalar>& node, const Frame<Scalar>& other) const {
    const bool forward = node.s < other.s;
    const Link<Scalar> link = forward ? make_link<Scalar>(model_, node, other, tolerance()) : make_link<Scalar>(model_, other, node, tolerance());
    const auto& here = forward ? link.left_energies : link.right_energies;
    const auto& there = forward ? link.right_energies : link.left_energies;
    return shared_groups(frequency_groups(here, tolerance()), there, tolerance()).count();
  }

  /// The end of the stretch, seen from `node`, in which more frequencies coincide than all the way
  /// to `other`; nothing if there is none or it is short.
  std::optional<Frame<Scalar>> window(const Frame<Scalar>& node, const Frame<Scalar>& other) const {
    const std::size_t apart = shared(node, other);
    if (frequency_groups(node.energies, tolerance()).count() >= apart) return std::nullopt;
    const double direction = node.s < other.s ? 1.0 : -1.0, length = std::abs(other.s - node.s);
    double inside = kShortWindow * range_, outside = length;
    if (inside >= length) return std::nullopt;
    Frame<Scalar> found = solve(node.s + direction * inside);
    const std::size_t together = shared(node, found);
    if (together >= apart) return std::nullopt;
    while (outside - inside > 1e-9 * range_) {
      Frame<Scalar> probe = solve(node.s + direction * 0.5 * (inside + outside));
      if (shared(node, probe) <= together) {
        inside = 0.5 * (inside + outside);
        found = std::move(probe);
      } else {
        outside = 0.5 * (inside + outside);
      }
    }
    return found;
  }

  void orient_all() {
    for (std::size_t k = 1; k < grid_.nodes.size(); ++k) {
      Link<Scalar> link = make_link<Scalar>(model_, grid_.nodes[k - 1], grid_.nodes[k], tolerance());
      orient(grid_.nodes[k], link);
    }
  }

  const LevelModel<Scalar>& model_;
  TrackOptions options_;
  double range_;
  BaseGrid<Scalar> grid_;
};

}  // namespace

template <class Scalar>
BaseGrid<Scalar> base_grid(const LevelModel<Scalar>& model, const TrackOptions& options) {
  TARN_CHECK(options.s_max > options.s_min);
  return Builder<Scalar>(model, options).build();
}

template BaseGrid<double> base_grid<double>(const LevelModel<double>&, const TrackOptions&);
template BaseGrid<Complex> base_grid<Complex>(const LevelModel<Complex>&, const TrackOptions&);

}  // namespace tarn::runtime
