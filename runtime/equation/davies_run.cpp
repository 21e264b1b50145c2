#include <algorithm>
#include <limits>
#include <optional>

#include "runtime/equation/davies.h"
#include "runtime/equation/davies_explicit.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using States = std::vector<Density>;
constexpr double kUnknown = std::numeric_limits<double>::infinity();

/// The outcome of a pass, or of two combined.
struct Answer {
  States states;
  std::vector<Eigen::VectorXd> manifolds;
};

/// Largest difference of a population, in the manifolds of levels and in the computational basis.
double distance(const Answer& x, const Answer& y) {
  double most = 0;
  for (std::size_t k = 0; k < x.states.size(); ++k) {
    most = std::max(most, (x.states[k] - y.states[k]).diagonal().cwiseAbs().maxCoeff());
    most = std::max(most, (x.manifolds[k] - y.manifolds[k]).cwiseAbs().maxCoeff());
  }
  return most;
}

double state_distance(const Answer& x, const Answer& y) {
  double most = 0;
  for (std::size_t k = 0; k < x.states.size(); ++k) most = std::max(most, (x.states[k] - y.states[k]).norm());
  return most;
}

Answer extrapolated(const Answer& coarse, const Answer& fine) {
  Answer better;
  for (std::size_t k = 0; k < fine.states.size(); ++k) {
    better.states.push_back((4.0 * fine.states[k] - coarse.states[k]) / 3.0);
    better.manifolds.push_back((4.0 * fine.manifolds[k] - coarse.manifolds[k]) / 3.0);
  }
  return better;
}

/// What decides: the state where coherences are read, else the populations.
double deciding_distance(const Answer& x, const Answer& y, bool whole_state) {
  return whole_state ? std::max(distance(x, y), state_distance(x, y)) : distance(x, y);
}

/// Passes with halved steps, the answer they suggest and what it is off by.
class Refinement {
 public:
  explicit Refinement(bool whole_state) : whole_state_(whole_state) {}

  void add(Answer fine) {
    if (passes_ == 0) {
      plain_ = std::move(fine);
    } else {
      Answer better = extrapolated(plain_, fine);
      const double change = deciding_distance(plain_, fine, whole_state_);
      error_ = change;
      state_error_ = state_distance(plain_, fine);
      if (passes_ > 1) judge(better, change);
      change_ = change;
      plain_ = std::move(fine);
      better_ = std::move(better);
    }
    ++passes_;
  }

  /// Of answer(): the last move of the extrapolated states, or a tenth of that of the plain ones;
  /// all of it while the steps do not yet act as the square of their length.
  double error() const { return error_; }
  double state_error() const { return state_error_; }
  States answer() && { return passes_ > 1 ? std::move(better_.states) : std::move(plain_.states); }

 private:
  void judge(const Answer& better, double change) {
    const double moved = deciding_distance(better_, better, whole_state_);
    // A small move may be chance: extrapolation is not trusted to gain more than a factor of 10, and
    // that only after the steps acted as the square of their length twice in a row.
    const bool regular = change < 0.4 * change_;
    const double share = !regular ? 1.0 : was_regular_ ? 0.1 : 0.5;
    error_ = std::max(moved, share * change);
    was_regular_ = regular;
    state_error_ = std::max(state_error_ / 3.0, state_distance(better_, better));
  }

  bool whole_state_;
  bool was_regular_ = false;
  int passes_ = 0;
  Answer plain_, better_;
  double change_ = kUnknown, error_ = kUnknown, state_error_ = kUnknown;
};

void note(DaviesAnswer& answer, const DaviesPass& pass) {
  answer.counters += pass.counters;
  answer.leakage = pass.leakage;
}

template <class Scalar>
std::optional<RunError> by_fast_steps(const DaviesTables<Scalar>& tables, const DaviesRun& run, const DaviesOptions& options, DaviesAnswer& answer) {
  Refinement refinement(options.whole_state);
  double steps = 0;
  for (int depth = options.first_depth; depth <= options.last_depth && 2 * steps <= options.max_steps; ++depth) {
    auto pass = davies_pass<Scalar>(tables, run, depth, options);
    if (!pass) return pass.error();
    steps = static_cast<double>(pass->counters.steps);
    note(answer, *pass);
    answer.depth = depth;
    refinement.add({std::move(pass->states), std::move(pass->manifolds)});
    if (refinement.error() <= options.tolerance || steps == 0) break;
  }
  answer.error = steps == 0 ? 0.0 : refinement.error();
  answer.state_error = steps == 0 ? 0.0 : refinement.state_error();
  answer.states = std::move(refinement).answer();
  return std::nullopt;
}

/// The same run with every segment integrated explicitly, at two tolerances.
template <class Scalar>
std::optional<RunError> by_explicit_steps(const DaviesTables<Scalar>& tables, const DaviesRun& run, const DaviesOptions& options, DaviesAnswer& answer) {
  DaviesRun driven = run;
  if (!driven.drive && driven.jumps.empty()) {
    const auto dimension = run.initial.rows();
    driven.jumps.push_back({Eigen::MatrixXcd::Identity(dimension, dimension), 0.0});
  }
  std::optional<Answer> last;
  answer.error = answer.state_error = kUnknown;
  for (int depth = 0; depth <= 4; ++depth) {
    auto pass = davies_pass<Scalar>(tables, driven, depth, options);
    if (!pass) return pass.error();
    note(answer, *pass);
    Answer next{std::move(pass->states), std::move(pass->manifolds)};
    if (last) {
      answer.error = deciding_distance(*last, next, options.whole_state);
      answer.state_error = state_distance(*last, next);
    }
    last = std::move(next);
    if (answer.error <= options.tolerance) break;
  }
  answer.states = std::move(last->states);
  answer.explicitly = true;
  return std::nullopt;
}

/// What passes have in common and so cannot show by their difference: the drift of the trace where no
/// level is left out, and of coherences the rounding of the phases they have added up.
template <class Scalar>
double rounding_of(const Track<Scalar>& track, const DaviesRun& run, const DaviesOptions& options, const DaviesAnswer& answer) {
  double drift = 0;
  if (track.levels() == track.model().dimension) {
    const Complex trace = run.initial.trace();
    for (const Density& state : answer.states) drift = std::max(drift, std::abs(state.trace() - trace));
  }
  const double phase = options.whole_state ? track.width() * run.timeline.duration() : 0;
  return drift + std::numeric_limits<double>::epsilon() * phase;
}

}  // namespace

template <class Scalar>
Result<DaviesAnswer, RunError> run_davies(const DaviesTables<Scalar>& tables, const DaviesRun& run, const DaviesOptions& options) {
  DaviesAnswer answer;
  const bool must_be_explicit = run.drive || !run.jumps.empty();
  if (must_be_explicit) {
    if (auto error = by_explicit_steps<Scalar>(tables, run, options, answer)) return Unexpected{*error};
  } else {
    if (auto error = by_fast_steps<Scalar>(tables, run, options, answer)) return Unexpected{*error};
    const bool all_levels = tables.track().levels() == tables.track().model().dimension;
    if (answer.error > options.tolerance && all_levels) {
      DaviesAnswer second;
      const auto error = by_explicit_steps<Scalar>(tables, run, options, second);
      if (error && error->kind == "interrupted") return Unexpected{*error};
      second.counters += answer.counters;
      if (!error && second.error < answer.error) answer = std::move(second);
    }
  }
  answer.converged = answer.error <= options.tolerance;
  answer.error += rounding_of(tables.track(), run, options, answer);
  return answer;
}

template Result<DaviesAnswer, RunError> run_davies<double>(const DaviesTables<double>&, const DaviesRun&, const DaviesOptions&);
template Result<DaviesAnswer, RunError> run_davies<Complex>(const DaviesTables<Complex>&, const DaviesRun&, const DaviesOptions&);

}  // namespace tarn::runtime
