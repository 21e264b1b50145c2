#include "runtime/equation/davies_refinement.h"

#include <algorithm>

#include "lang/support/check.h"
#include "runtime/equation/davies_explicit.h"

namespace tarn::runtime {
namespace {

using States = std::vector<Density>;

constexpr int kLastExplicitDepth = 4;
// Of the distance to the last pass and to the answer before: where passes act as the square of their step, and
// where they do not (yet).
constexpr double kOfPass = 0.1, kOfPassIrregular = 1.2;
constexpr double kOfAnswer = 0.7, kOfAnswerIrregular = 1.5;
constexpr double kLeastDecrease = 0.35, kMostDecrease = 0.15;

double distance(const States& x, const States& y) {
  double most = 0;
  for (std::size_t k = 0; k < x.size(); ++k) most = std::max(most, (x[k] - y[k]).norm());
  return most;
}

States extrapolated(const States& coarse, const States& fine) {
  States better;
  for (std::size_t k = 0; k < fine.size(); ++k) better.push_back((4.0 * fine[k] - coarse[k]) / 3.0);
  return better;
}

void keep_three(std::vector<States>& list) {
  if (list.size() > 3) list.erase(list.begin());
}

/// True if the last three passes converge as the square of their step.
bool is_regular(const std::vector<States>& plain) {
  if (plain.size() < 3) return false;
  const std::size_t last = plain.size() - 1;
  const double before = distance(plain[last - 1], plain[last - 2]), now = distance(plain[last], plain[last - 1]);
  return now >= kMostDecrease * before && now <= kLeastDecrease * before;
}

}  // namespace

template <class Scalar>
DaviesRefinement<Scalar>::DaviesRefinement(const DaviesTables<Scalar>& tables, DaviesRun run, DaviesOptions options)
    : tables_(tables), run_(std::move(run)), options_(std::move(options)), depth_(options_.first_depth) {
  if (run_.drive || !run_.jumps.empty()) {
    explicitly_ = true;
    depth_ = 0;
  }
}

template <class Scalar>
Result<DaviesAnswer, RunError> DaviesRefinement<Scalar>::next() {
  TARN_CHECK(!exhausted_);
  if (!explicitly_) return next_by_fast_steps();
  auto answer = next_by_explicit_steps();
  if (answer || !fast_ || answer.error().kind == "interrupted") return answer;
  exhausted_ = true;  // An answer that misses the tolerance is better than none.
  fast_->counters = {};
  return *std::move(fast_);
}

template <class Scalar>
Result<DaviesPass, RunError> DaviesRefinement<Scalar>::pass(int depth, Counters& counters) {
  auto pass = davies_pass<Scalar>(tables_, run_, depth, options_, explicitly_);
  if (pass) counters += pass->counters;
  return pass;
}

template <class Scalar>
bool DaviesRefinement<Scalar>::may_go_explicit() const {
  const Track<Scalar>& track = tables_.track();
  return track.levels() == track.model().dimension && track.width() * run_.timeline.duration() <= options_.max_explicit_phase;
}

template <class Scalar>
void DaviesRefinement<Scalar>::leave_fast_steps(const DaviesAnswer& answer) {
  if (!may_go_explicit()) {
    exhausted_ = true;
    return;
  }
  explicitly_ = true;
  depth_ = 0;
  fast_ = answer;
  last_ = answer.states;
}

template <class Scalar>
Result<DaviesAnswer, RunError> DaviesRefinement<Scalar>::next_by_fast_steps() {
  DaviesAnswer answer;
  double steps = 0;
  const int passes = plain_.empty() ? 3 : 1;  // Two extrapolated answers are the least that can be compared.
  for (int i = 0; i < passes; ++i) {
    auto made = pass(depth_++, answer.counters);
    if (!made) return Unexpected{made.error()};
    steps = static_cast<double>(made->counters.steps);
    answer.floor = std::move(made->floor);
    answer.leakage = made->leakage;
    plain_.push_back(std::move(made->states));
    if (steps == 0) {  // Holds only: one exponential each, exact.
      exhausted_ = true;
      answer.states = plain_.back();
      return answer;
    }
    if (plain_.size() > 1) better_.push_back(extrapolated(plain_[plain_.size() - 2], plain_.back()));
  }
  const bool regular = is_regular(plain_);
  const std::size_t last = better_.size() - 1;
  answer.coarser.push_back({plain_.back(), regular ? kOfPass : kOfPassIrregular});
  answer.coarser.push_back({better_[last - 1], regular ? kOfAnswer : kOfAnswerIrregular});
  if (last >= 2 && !regular) answer.coarser.push_back({better_[last - 2], kOfAnswer});
  answer.states = better_.back();
  keep_three(plain_);
  keep_three(better_);
  if (depth_ > options_.last_depth || 2 * steps > options_.max_steps) leave_fast_steps(answer);
  return answer;
}

template <class Scalar>
Result<DaviesAnswer, RunError> DaviesRefinement<Scalar>::next_by_explicit_steps() {
  DaviesAnswer answer;
  const int passes = last_ ? 1 : 2;
  for (int i = 0; i < passes; ++i) {
    auto made = pass(depth_++, answer.counters);
    if (!made) return Unexpected{made.error()};
    if (last_) answer.coarser.push_back({std::move(*last_), 1});
    last_ = std::move(made->states);
    answer.floor = std::move(made->floor);
  }
  answer.states = *last_;
  exhausted_ = depth_ > kLastExplicitDepth;
  return answer;
}

template class DaviesRefinement<double>;
template class DaviesRefinement<std::complex<double>>;

}  // namespace tarn::runtime
