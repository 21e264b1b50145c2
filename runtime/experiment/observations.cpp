#include "runtime/experiment/observations.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "runtime/experiment/functions.h"
#include "runtime/experiment/outcome.h"

namespace tarn::runtime {
namespace {

/// The instants of one observable.
struct Moments {
  const Plan& plan;
  const Timeline& line;
  std::span<const double> settings;
  const Observable& observable;

  using Outcome = Result<std::vector<Instant>, RunError>;

  Outcome operator()(const AtEnd&) const { return std::vector{Instant{line.duration(), line.last_s}}; }
  Outcome operator()(const AtTime& at) const {
    const auto t = finite_setting(at.time, settings, "the time of an observable");
    if (!t) return Unexpected{t.error()};
    const double slack = 1e-12 * line.duration();
    if (*t < 0 || *t > line.duration() + slack) return std::vector<Instant>{};
    const double within = std::min(*t, line.duration());
    return std::vector{Instant{within, s_at(line, within)}};
  }
  Outcome operator()(const AtS& at) const {
    const auto s = finite_setting(at.s, settings, "the s of an observable");
    if (!s) return Unexpected{s.error()};
    const auto instant = instant_of_s(line, *s, at.last);
    return instant ? std::vector{*instant} : std::vector<Instant>{};
  }
  Outcome operator()(const Along& along) const { return even_instants(line, std::max(2u, along.samples)); }
  Outcome operator()(const Static&) const {
    if (occurrence_of(plan, observable) != Occurrence::scan) return (*this)(AtEnd{});
    std::vector<Instant> instants;
    for (const double s : plan.scan->s) instants.push_back({0, s});
    return instants;
  }
};

}  // namespace

Result<std::vector<Observation>, RunError> observations_of(const Plan& plan, const Timeline& timeline,
                                                           std::span<const double> settings) {
  // A scan may visit an s twice: the position keeps the two apart and in order.
  std::map<std::tuple<double, std::size_t, double>, Observation> found;
  for (std::uint32_t o = 0; o < plan.observables.size(); ++o) {
    const Observable& observable = plan.observables[o];
    const auto instants = std::visit(Moments{plan, timeline, settings, observable}, observable.moment);
    if (!instants) return Unexpected{instants.error()};
    const bool scan = occurrence_of(plan, observable) == Occurrence::scan;
    for (std::size_t k = 0; k < instants->size(); ++k) {
      Observation& observation = found[{(*instants)[k].t, scan ? k : 0, (*instants)[k].s}];
      observation.at = (*instants)[k];
      observation.observables.push_back(o);
    }
  }
  // Where no moment ever comes the run is still one, with nothing read on the way.
  if (plan.distribution_at_end || found.empty()) {
    Observation& end = found[{timeline.duration(), 0, timeline.last_s}];
    end.at = {timeline.duration(), timeline.last_s};
    end.distribution = plan.distribution_at_end;
  }
  std::vector<Observation> observations;
  for (auto& [key, observation] : found) observations.push_back(std::move(observation));
  return observations;
}

std::vector<std::uint32_t> readings_at(const Plan& plan, const Observation& observation) {
  std::set<std::uint32_t> rows;
  for (const std::uint32_t o : observation.observables) {
    rows.insert(plan.observables[o].readings.begin(), plan.observables[o].readings.end());
  }
  return {rows.begin(), rows.end()};
}

}  // namespace tarn::runtime
