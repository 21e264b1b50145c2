#include "runtime/experiment/pace.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

/// Builds a timeline piece by piece; stops at the first error.
class Walk {
 public:
  explicit Walk(std::span<const double> settings) : settings_(settings) {}

  void operator()(const PaceStart& piece) { start(position(piece.s)); }
  void operator()(const PaceRamp& piece) { move(position(piece.to), length(piece.over)); }
  void operator()(const PaceHold& piece) { move(line_.last_s, length(piece.time)); }
  void operator()(const PaceStep& piece) { step(position(piece.to)); }
  void operator()(const PaceFollow& piece);

  const std::optional<RunError>& error() const { return error_; }
  const Timeline& timeline() const { return line_; }

 private:
  void fail(std::string kind, std::string message, const Place& place) {
    if (!error_) error_ = RunError{std::move(kind), std::move(message), place};
  }
  double position(const Setting& setting) { return checked_s(settings_[setting.row], setting.place); }
  double checked_s(double s, const Place& place);
  double length(const Setting& setting);
  void move(double to, double time) {
    if (time > 0) {
      const double t = line_.duration();
      line_.segments.push_back({t, t + time, line_.last_s, to});
    }
    step(to);
  }
  void step(double to) {
    line_.last_s = to;
    first_piece_ = false;
  }
  void start(double s) {
    line_.last_s = s;
    if (first_piece_) line_.first_s = s;
  }

  bool first_piece_ = true;
  std::span<const double> settings_;
  Timeline line_;
  std::optional<RunError> error_;
};

double Walk::checked_s(double s, const Place& place) {
  if (!std::isfinite(s)) {
    fail("not_finite", "s of the pace is not finite here", place);
  } else if (s < -kSameS || s > 1 + kSameS) {
    fail("s_out_of_range", fmt::format("the pace asks for s = {:.6g}, but s lies in [0, 1]", s), place);
  }
  return std::clamp(s, 0.0, 1.0);
}

double Walk::length(const Setting& setting) {
  const double time = settings_[setting.row];
  if (!std::isfinite(time)) {
    fail("not_finite", "a time of the pace is not finite here", setting.place);
    return 0;
  }
  if (time < 0) {
    fail("negative_time", fmt::format("a piece of the pace lasts {:.6g} ns; it must not be negative", time),
         setting.place);
    return 0;
  }
  return time;
}

void Walk::operator()(const PaceFollow& piece) {
  TARN_CHECK(piece.t.size() == piece.s.size());
  if (piece.t.empty() || std::abs(piece.t.front()) > 0) {
    fail("pace_not_ascending", "a followed waveform starts at t = 0", piece.place);
    return;
  }
  start(checked_s(piece.s.front(), piece.place));
  for (std::size_t i = 1; i < piece.t.size(); ++i) {
    const double time = piece.t[i] - piece.t[i - 1];
    if (!(time > 0) || !std::isfinite(time)) {
      fail("pace_not_ascending",
           fmt::format("the times of a followed waveform must rise, but row {} does not", i + 1), piece.place);
      return;
    }
    move(checked_s(piece.s[i], piece.place), time);
  }
}

bool moves(const Segment& segment) { return std::abs(segment.s1 - segment.s0) > kSameS; }

double time_in(const Segment& segment, double s) {
  const double part = (s - segment.s0) / (segment.s1 - segment.s0);
  return std::clamp(segment.t0 + part * (segment.t1 - segment.t0), segment.t0, segment.t1);
}

/// First and last time at which a segment has the value s; none if it does not.
std::optional<std::pair<double, double>> meets(const Segment& segment, double s) {
  const auto [low, high] = std::minmax(segment.s0, segment.s1);
  if (s < low - kSameS || s > high + kSameS) return std::nullopt;
  if (!moves(segment)) return std::pair{segment.t0, segment.t1};
  const double t = time_in(segment, s);
  return std::pair{t, t};
}

}  // namespace

Result<Timeline, RunError> work_out_pace(const std::vector<PacePiece>& pieces,
                                         std::span<const double> settings) {
  Walk walk(settings);
  for (const PacePiece& piece : pieces) {
    std::visit(walk, piece);
    if (walk.error()) return Unexpected{*walk.error()};
  }
  return walk.timeline();
}

double s_at(const Timeline& timeline, double t) {
  if (timeline.segments.empty() || t >= timeline.duration()) return timeline.last_s;
  const auto after = std::upper_bound(timeline.segments.begin(), timeline.segments.end(), t,
                                      [](double value, const Segment& segment) { return value < segment.t1; });
  const Segment& segment = *after;
  const double part = std::clamp((t - segment.t0) / (segment.t1 - segment.t0), 0.0, 1.0);
  return segment.s0 + part * (segment.s1 - segment.s0);
}

std::optional<Instant> instant_of_s(const Timeline& timeline, double s, bool last) {
  std::optional<Instant> found;
  if (std::abs(timeline.first_s - s) <= kSameS) found = Instant{0, s};
  for (const Segment& segment : timeline.segments) {
    if (found && !last) return found;
    if (const auto met = meets(segment, s)) found = Instant{last ? met->second : met->first, s};
  }
  if ((!found || last) && std::abs(timeline.last_s - s) <= kSameS) found = Instant{timeline.duration(), s};
  return found;
}

std::vector<Instant> even_instants(const Timeline& timeline, std::size_t count) {
  TARN_CHECK(count >= 2);
  const double duration = timeline.duration();
  if (!(duration > 0)) return {{0, timeline.last_s}};
  std::vector<Instant> instants(count);
  for (std::size_t i = 0; i < count; ++i) {
    const double t = i + 1 == count ? duration : duration * static_cast<double>(i) / static_cast<double>(count - 1);
    instants[i] = {t, s_at(timeline, t)};
  }
  return instants;
}

RangeOfS range_of_s(const Timeline& timeline) {
  RangeOfS range{std::min(timeline.first_s, timeline.last_s), std::max(timeline.first_s, timeline.last_s)};
  for (const Segment& segment : timeline.segments) {
    range.lowest = std::min({range.lowest, segment.s0, segment.s1});
    range.highest = std::max({range.highest, segment.s0, segment.s1});
  }
  return range;
}

std::vector<double> times_of_positions(const Timeline& timeline, std::span<const double> positions) {
  std::vector<double> times;
  for (const Segment& segment : timeline.segments) {
    if (!moves(segment)) continue;
    const auto [low, high] = std::minmax(segment.s0, segment.s1);
    for (const double s : positions) {
      if (s > low + kSameS && s < high - kSameS) times.push_back(time_in(segment, s));
    }
  }
  std::sort(times.begin(), times.end());
  times.erase(std::unique(times.begin(), times.end()), times.end());
  return times;
}

}  // namespace tarn::runtime
