#include "runtime/experiment/run_record.h"

#include <array>
#include <chrono>
#include <cmath>
#include <ctime>
#include <map>
#include <nlohmann/json.hpp>

#include "runtime/experiment/grid.h"
#include "runtime/experiment/tables.h"

namespace tarn::runtime {
namespace {

using nlohmann::ordered_json;

/// JSON knows no infinity and no NaN.
ordered_json json_number(double value) { return std::isfinite(value) ? ordered_json(value) : ordered_json(nullptr); }

const char* ending_name(Ending ending) {
  switch (ending) {
    case Ending::finished: return "finished";
    case Ending::interrupted: return "interrupted";
    case Ending::out_of_time: return "out of time";
  }
  return "";
}

/// The swept parameters of a grid point, shown.
ordered_json point_of(const Plan& plan, std::uint64_t index) {
  ordered_json point = ordered_json::object();
  const std::vector<double> values = grid_values(plan.axes, index);
  std::size_t next = 0;
  for (const Axis& axis : plan.axes) {
    for (const AxisColumn& column : axis.columns) {
      point[column_name(column.parameter, column.unit)] = *field_number(parameter_text(values[next++], column.unit));
    }
  }
  return point;
}

ordered_json claim_record(const ClaimReport& claim, const Plan& plan) {
  ordered_json record = {{"claim", claim.text}, {"verdict", verdict_name(claim.verdict)}};
  if (!claim.reason.empty()) record["reason"] = claim.reason;
  record["file"] = claim.place.file;
  record["line"] = claim.place.line;
  record["places"] = {{"judged", claim.tally.selected},
                      {"hold", claim.tally.holding},
                      {"fail", claim.tally.failing},
                      {"within error", claim.tally.straddling}};
  if (claim.tally.weakest) {
    ordered_json weakest = {{"at", point_of(plan, claim.tally.weakest_point)}};
    if (!claim.tally.weakest_equation.empty()) weakest["equation"] = claim.tally.weakest_equation;
    if (claim.tally.weakest_at) {
      weakest["t [ns]"] = claim.tally.weakest_at->t;
      weakest["s"] = claim.tally.weakest_at->s;
    }
    weakest["margin"] = json_number(claim.tally.weakest->margin);
    weakest["error"] = json_number(claim.tally.weakest->error);
    record["weakest"] = weakest;
  }
  return record;
}

ordered_json counters_record(const Counters& counters) {
  return {{"steps", counters.steps},
          {"rejected", counters.rejected},
          {"evaluations", counters.evaluations},
          {"exponentials", counters.exponentials},
          {"decompositions", counters.decompositions}};
}

std::string now_text() {
  const std::time_t now = std::chrono::system_clock::to_time_t(std::chrono::system_clock::now());
  std::tm utc{};
  gmtime_r(&now, &utc);
  char text[32];
  const std::size_t length = std::strftime(text, sizeof text, "%Y-%m-%dT%H:%M:%SZ", &utc);
  return std::string(text, length);
}

/// The places of failed points, each once with the points it belongs to.
ordered_json failures_record(const RunReport& report) {
  std::vector<std::pair<Place, std::vector<std::uint64_t>>> places;  // in grid order
  std::map<std::pair<std::string, std::array<std::uint32_t, 3>>, std::size_t> known;
  for (const PointOutcome& point : report.points) {
    if (!point.error || point.error->place == Place{}) continue;
    const Place& at = point.error->place;
    const auto [row, fresh] = known.try_emplace({at.file, {at.line, at.column, at.column_end}}, places.size());
    if (fresh) places.push_back({at, {}});
    places[row->second].second.push_back(point.index);
  }
  ordered_json record = ordered_json::array();
  for (const auto& [at, points] : places) {
    record.push_back({{"file", at.file}, {"line", at.line}, {"column", at.column}, {"column end", at.column_end}, {"points", points}});
  }
  return record;
}

std::map<std::uint64_t, Place> read_places(const ordered_json& record) {
  std::map<std::uint64_t, Place> places;
  for (const ordered_json& failure : record.value("failures", ordered_json::array())) {
    const Place at{failure.value("file", ""), failure.value("line", 0u), failure.value("column", 0u), failure.value("column end", 0u)};
    for (const std::uint64_t point : failure.value("points", std::vector<std::uint64_t>{})) places[point] = at;
  }
  return places;
}

}  // namespace

ordered_json run_key(const Plan& plan, const RunOptions& options) {
  ordered_json key = {{"version", options.provenance.version},
                      {"build", options.provenance.build},
                      {"experiment", plan.experiment}};
  ordered_json texts = ordered_json::array();
  for (const Provenance::Text& text : options.provenance.texts) {
    texts.push_back({{"name", text.name}, {"sha256", text.sha256}});
  }
  key["texts"] = texts;
  ordered_json parameters = ordered_json::object();
  for (const Parameter& parameter : plan.parameters) {
    parameters[column_name(parameter.name, parameter.unit)] =
        *field_number(parameter_text(parameter.value, parameter.unit));
  }
  key["parameters"] = parameters;
  key["counts"] = ordered_json::object();
  for (const auto& [name, value] : options.provenance.counts) key["counts"][name] = value;
  key["seeds"] = ordered_json::object();
  return key;
}

std::string run_record(const RunReport& report, const ordered_json& key, const RunOptions& options) {
  ordered_json record = {{"key", key}, {"ending", ending_name(report.ending)}};
  record["sample"] = report.total < report.grid;
  record["points"] = {{"grid", report.grid},
                      {"asked", report.total},
                      {"done", report.points.size()},
                      {"failed", report.failed},
                      {"marked", report.loose}};
  ordered_json claims = ordered_json::array();
  for (const ClaimReport& claim : report.claims) claims.push_back(claim_record(claim, *report.any_plan));
  record["claims"] = claims;
  record["failures"] = failures_record(report);
  record["left out"] = report.left_out;
  record["remarks"] = report.remarks;
  record["leakage"] = report.leakage;
  // Points share work with those that they happen to go with, so that counters tell of this run alone.
  record["machine"] = {{"host", options.provenance.host},
                       {"ended", now_text()},
                       {"seconds", report.seconds},
                       {"jobs", options.jobs},
                       {"counters", counters_record(report.counters)},
                       {"reused points", report.reused},
                       {"computed points", report.fresh}};
  return record.dump(2) + "\n";
}

Recorded read_record(const std::string& text) {
  Recorded recorded;
  const ordered_json record = ordered_json::parse(text, nullptr, false);
  if (record.is_discarded() || !record.contains("machine") || !record["machine"].contains("counters")) return recorded;
  const ordered_json& found = record["machine"]["counters"];
  recorded.counters.steps = found.value("steps", std::uint64_t{0});
  recorded.counters.rejected = found.value("rejected", std::uint64_t{0});
  recorded.counters.evaluations = found.value("evaluations", std::uint64_t{0});
  recorded.counters.exponentials = found.value("exponentials", std::uint64_t{0});
  recorded.counters.decompositions = found.value("decompositions", std::uint64_t{0});
  recorded.remarks = record.value("remarks", std::vector<std::string>{});
  recorded.leakage = record.value("leakage", 0.0);
  recorded.places = read_places(record);
  recorded.stalled = record.value("ending", "") == ending_name(Ending::out_of_time) &&
                     record["machine"].value("computed points", std::uint64_t{1}) == 0;
  return recorded;
}

}  // namespace tarn::runtime
