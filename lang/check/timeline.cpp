#include "lang/check/timeline.h"

#include <algorithm>
#include <cmath>

namespace tarn {
namespace {

constexpr double kSameS = 1e-12;

/// Stretches of a pace along which s moves straight from `from` to `to`, and the s a step ends at.
struct Stretch {
  double from = 0, to = 0, time = 0;
};

std::optional<double> constant(const Session& session, NodeId node) {
  const Node& value = session.graph[node];
  return value.op == NodeOp::constant ? std::optional(value.number) : std::nullopt;
}

/// Adds the piece; false if it depends on a parameter.
struct Walk {
  const Session& session;
  double s = 0;
  std::vector<Stretch> stretches{{0, 0, 0}};

  bool move(std::optional<double> to, std::optional<double> time) {
    if (!to || !time) return false;
    // A step has no stretch of its own, but s is where it ends.
    stretches.push_back({*time > 0 ? s : *to, *to, *time});
    s = *to;
    return true;
  }
  bool operator()(const PaceStartI& piece) {
    const auto at = constant(session, piece.s);
    if (!at || stretches.size() > 1) return false;
    s = *at;
    stretches = {{s, s, 0}};
    return true;
  }
  bool operator()(const PaceRampI& piece) { return move(constant(session, piece.to), constant(session, piece.over)); }
  bool operator()(const PaceHoldI& piece) { return move(s, constant(session, piece.time)); }
  bool operator()(const PaceStepI& piece) { return move(constant(session, piece.to), 0); }
  bool operator()(const PaceFollowI& piece) {
    if (stretches.size() == 1) stretches = {{piece.s.front(), piece.s.front(), 0}};
    s = piece.s.front();
    for (std::size_t k = 1; k < piece.t.size(); ++k) move(piece.s[k], piece.t[k] - piece.t[k - 1]);
    return true;
  }
};

}  // namespace

void check_moment(Session& session, const ast::Observe& observe, Span where, const MomentI& moment, const Instance& instance) {
  const auto* at_time = std::get_if<AtTimeI>(&moment);
  const auto* at_s = std::get_if<AtSI>(&moment);
  if (at_time == nullptr && at_s == nullptr) return;
  const auto asked = constant(session, at_time != nullptr ? at_time->time : at_s->s);
  Walk walk{session};
  for (const PacePieceI& piece : instance.pace) {
    if (!std::visit(walk, piece)) return;
  }
  if (!asked || !(*asked >= 0) || (at_s != nullptr && *asked > 1)) return;
  if (at_time != nullptr) {
    double length = 0;
    for (const Stretch& stretch : walk.stretches) length += stretch.time;
    if (*asked <= length * (1 + 1e-12)) return;
    session.report(where, diag::moment_outside, observe.name.text, fmt::format("t = {}", format_quantity(*asked, kTime)),
                   fmt::format("the pace lasts {}", format_quantity(length, kTime)))
        .remedy("`at end` is the last moment");
    return;
  }
  double low = 1, high = 0;
  for (const Stretch& stretch : walk.stretches) {
    const auto [least, most] = std::minmax(stretch.from, stretch.to);
    if (*asked >= least - kSameS && *asked <= most + kSameS) return;
    low = std::min(low, least);
    high = std::max(high, most);
  }
  const bool beyond = *asked < low || *asked > high;
  const std::string pace = beyond ? fmt::format("the pace stays in {:.6g} .. {:.6g}", low, high) : "the pace steps over it";
  session.report(where, diag::moment_outside, observe.name.text, fmt::format("s = {:.6g}", *asked), pace)
      .remedy(beyond ? "" : "`ramp to` passes what `step to` leaves out");
}

}  // namespace tarn
