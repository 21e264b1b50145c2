#include "runtime/experiment/summary.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "runtime/experiment/grid.h"
#include "runtime/experiment/tables.h"

namespace tarn::runtime {
namespace {

constexpr int kMostDigits = 8;
constexpr std::size_t kWidestStatus = 44;

/// The results table with every pair of value and error as one field.
CsvTable compact(const CsvTable& results) {
  CsvTable table;
  std::vector<bool> is_error(results.header.size(), false);
  for (std::size_t c = 1; c < results.header.size(); ++c) {
    std::string name = results.header[c];
    const std::size_t bracket = name.rfind(" [");
    const std::string unit = bracket == std::string::npos ? "" : name.substr(bracket);
    if (bracket != std::string::npos) name.resize(bracket);
    is_error[c] = name.ends_with(" error") && name.substr(0, name.size() - 6) + unit == results.header[c - 1];
  }
  for (std::size_t c = 0; c < results.header.size(); ++c) {
    if (!is_error[c]) table.header.push_back(results.header[c]);
  }
  for (const std::vector<std::string>& row : results.rows) {
    std::vector<std::string>& fields = table.rows.emplace_back();
    for (std::size_t c = 0; c < row.size(); ++c) {
      if (is_error[c]) continue;
      const bool has_error = c + 1 < row.size() && is_error[c + 1];
      fields.push_back(has_error && !row[c].empty() ? digits_allowed(*field_number(row[c]), *field_number(row[c + 1]))
                                                    : row[c]);
    }
  }
  return table;
}

/// The status column says something only where some point is not `ok`.
void drop_idle_status(CsvTable& table) {
  const bool idle = std::all_of(table.rows.begin(), table.rows.end(), [](const auto& row) { return row.back() == kStatusOk; });
  if (idle) table.header.pop_back();
  for (std::vector<std::string>& row : table.rows) {
    if (idle) row.pop_back();
    else if (row.back().size() > kWidestStatus) row.back() = row.back().substr(0, kWidestStatus - 3) + "...";
  }
}

void elide(CsvTable& table, std::size_t most_rows) {
  if (table.rows.size() <= most_rows || table.header.empty()) return;
  const std::size_t head = (most_rows - 1) / 2, tail = most_rows - 1 - head;
  const std::size_t hidden = table.rows.size() - head - tail;
  std::vector<std::vector<std::string>> rows(table.rows.begin(), table.rows.begin() + static_cast<std::ptrdiff_t>(head));
  std::vector<std::string> gap(table.header.size());
  gap.front() = fmt::format("... {} more", hidden);
  rows.push_back(gap);
  rows.insert(rows.end(), table.rows.end() - static_cast<std::ptrdiff_t>(tail), table.rows.end());
  table.rows = std::move(rows);
}

std::string aligned(const CsvTable& table) {
  std::vector<std::size_t> widths;
  for (std::size_t c = 0; c < table.header.size(); ++c) {
    std::size_t width = table.header[c].size();
    for (const auto& row : table.rows) width = std::max(width, row[c].size());
    widths.push_back(width);
  }
  std::string text;
  const auto add = [&](const std::vector<std::string>& row) {
    std::string line;
    for (std::size_t c = 0; c < row.size(); ++c) line += fmt::format("{}{:<{}}", c == 0 ? "" : "  ", row[c], widths[c]);
    line.erase(line.find_last_not_of(' ') + 1);
    text += line + "\n";
  };
  add(table.header);
  for (const auto& row : table.rows) add(row);
  return text;
}

std::string place_of(const ClaimReport& claim, const Plan& plan) {
  std::string text;
  const std::vector<double> values = grid_values(plan.axes, claim.tally.weakest_point);
  std::size_t next = 0;
  const auto add = [&](const std::string& piece) { text += (text.empty() ? " at " : ", ") + piece; };
  for (const Axis& axis : plan.axes) {
    for (const AxisColumn& column : axis.columns) {
      const std::string unit = column.unit.label.empty() ? "" : " " + column.unit.label;
      add(fmt::format("{} = {}{}", column.parameter, parameter_text(values[next++], column.unit), unit));
    }
  }
  if (!claim.tally.weakest_equation.empty()) add(fmt::format("equation = {}", claim.tally.weakest_equation));
  if (claim.tally.weakest_at) {
    if (!plan.scan) add(fmt::format("t = {:.6g} ns", claim.tally.weakest_at->t));
    add(fmt::format("s = {:.6g}", claim.tally.weakest_at->s));
  }
  return text;
}

std::string claim_line(const ClaimReport& claim, const Plan& plan) {
  return fmt::format("{:<9}  {}\n", verdict_name(claim.verdict), claim_text(claim, plan));
}

/// How many points there are, where not all of the grid went well.
std::string counts(const RunReport& report) {
  std::string text;
  if (report.points.size() < report.total) text += fmt::format("{} of {} points are done\n", report.points.size(), report.total);
  if (report.total < report.grid) text += fmt::format("a sample: {} of the grid's {} points\n", report.total, report.grid);
  if (report.loose > 0) text += fmt::format("{} of {} points are marked: see status\n", report.loose, report.total);
  if (report.failed > 0) text += fmt::format("{} of {} points failed: see status\n", report.failed, report.total);
  return text;
}

}  // namespace

std::string claim_text(const ClaimReport& claim, const Plan& plan) {
  std::string text = claim.text;
  if (!claim.reason.empty()) text += fmt::format("  ({})", claim.reason);
  // A single point has no coordinates to name.
  const std::string place = claim.tally.weakest && claim.tally.selected > 0 ? place_of(claim, plan) : "";
  if (!place.empty()) text += "; closest" + place;
  return text;
}

std::string digits_allowed(double value, double error) {
  if (!std::isfinite(value) || value == 0) return fmt::format("{:g}", value);
  int digits = kMostDigits;
  if (error > 0 && std::isfinite(error)) {
    const double known = std::floor(std::log10(std::abs(value))) - std::floor(std::log10(error)) + 2;
    digits = static_cast<int>(std::clamp(known, 1.0, double{kMostDigits}));
  }
  return fmt::format("{:.{}g}", value, digits);
}

std::string summary(const RunReport& report, std::size_t most_rows) {
  std::vector<const PointOutcome*> points;
  for (const PointOutcome& point : report.points) points.push_back(&point);
  const ResultTables tables = make_tables(points, report.plan_of, *report.any_plan);
  std::string text;
  const CsvTable& results = tables.at("results.csv");
  if (!results.rows.empty()) {
    CsvTable table = compact(results);
    drop_idle_status(table);
    elide(table, most_rows);
    if (!table.header.empty()) text += aligned(table);
  }
  for (const auto& [name, table] : tables) {
    if (name != "results.csv") text += fmt::format("{}: {} rows\n", name, table.rows.size());
  }
  for (const ClaimReport& claim : report.claims) text += claim_line(claim, *report.any_plan);
  return text + counts(report);
}

}  // namespace tarn::runtime
