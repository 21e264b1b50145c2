#include "runtime/experiment/tables.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "lang/support/check.h"
#include "runtime/experiment/grid.h"

namespace tarn::runtime {
namespace {

const DisplayUnit kPlain{};
const DisplayUnit kNanoseconds{"ns", 1};

bool listed(const Plan& plan, const Observable& observable, Occurrence occurrence) {
  return observable.shown && !observable.name.empty() && occurrence_of(plan, observable) == occurrence;
}

/// Observables of results.csv and traces.csv, in the order of the plan.
std::vector<std::size_t> listed_rows(const Plan& plan, bool trace) {
  std::vector<std::size_t> rows;
  for (std::size_t o = 0; o < plan.observables.size(); ++o) {
    const Observable& observable = plan.observables[o];
    const bool fits = trace ? listed(plan, observable, Occurrence::trace)
                            : listed(plan, observable, Occurrence::once) || listed(plan, observable, Occurrence::scan);
    if (fits) rows.push_back(o);
  }
  return rows;
}

std::string shown(double value, const DisplayUnit& unit) { return number_text(value / unit.factor); }

void append_answer(std::vector<std::string>& row, const Answer& answer, const DisplayUnit& unit) {
  row.push_back(shown(answer.value, unit));
  row.push_back(shown(answer.error, unit));
}

void append_header(std::vector<std::string>& header, const Plan& plan, const std::vector<std::size_t>& rows) {
  for (const std::size_t o : rows) {
    const Observable& observable = plan.observables[o];
    header.push_back(column_name(observable.name, observable.unit));
    header.push_back(column_name(observable.name + " error", observable.unit));
  }
}

std::vector<std::string> key_header(const Plan& plan) {
  std::vector<std::string> header;
  for (const Axis& axis : plan.axes) {
    for (const AxisColumn& column : axis.columns) header.push_back(column_name(column.parameter, column.unit));
  }
  if (!plan.compared.empty()) header.push_back("equation");
  return header;
}

std::vector<std::string> key_fields(const Plan& plan, std::uint64_t index) {
  const std::vector<double> values = grid_values(plan.axes, index);
  std::vector<std::string> fields;
  for (const Axis& axis : plan.axes) {
    for (const AxisColumn& column : axis.columns) {
      fields.push_back(parameter_text(values[fields.size()], column.unit));
    }
  }
  if (!plan.compared.empty()) fields.push_back(plan.choice.label);
  return fields;
}

/// The moments of a trace: those of all its observables, each once, ascending in t.
std::vector<Instant> trace_instants(const PointOutcome& outcome, const std::vector<std::size_t>& rows) {
  std::map<double, double> s_of_t;
  for (const std::size_t o : rows) {
    for (const Sample& sample : outcome.series[o]) s_of_t[sample.at.t] = sample.at.s;
  }
  std::vector<Instant> instants;
  for (const auto& [t, s] : s_of_t) instants.push_back({t, s});
  return instants;
}

/// The answer of a series at position k: a series of one holds everywhere.
const Answer* answer_at(const std::vector<Sample>& series, std::size_t k) {
  if (series.empty()) return nullptr;
  if (series.size() == 1) return &series.front().answer;
  return k < series.size() ? &series[k].answer : nullptr;
}

void add_results(CsvTable& table, const Plan& plan, const PointOutcome& outcome) {
  const std::vector<std::size_t> rows = listed_rows(plan, false);
  const std::size_t lines = plan.scan ? plan.scan->s.size() : 1;
  for (std::size_t k = 0; k < lines; ++k) {
    std::vector<std::string> row = key_fields(plan, outcome.index);
    if (plan.scan) row.push_back(number_text(plan.scan->s[k]));
    for (const std::size_t o : rows) {
      const Answer* answer = outcome.series.empty() ? nullptr : answer_at(outcome.series[o], k);
      append_answer(row, answer ? *answer : Answer{}, plan.observables[o].unit);
    }
    row.push_back(outcome.status);
    table.rows.push_back(std::move(row));
  }
}

void add_traces(CsvTable& table, const Plan& plan, const PointOutcome& outcome) {
  if (outcome.series.empty()) return;
  const std::vector<std::size_t> rows = listed_rows(plan, true);
  std::vector<std::size_t> next(rows.size(), 0);
  for (const Instant& at : trace_instants(outcome, rows)) {
    std::vector<std::string> row = key_fields(plan, outcome.index);
    row.push_back(number_text(at.t));
    row.push_back(number_text(at.s));
    for (std::size_t c = 0; c < rows.size(); ++c) {
      const std::vector<Sample>& series = outcome.series[rows[c]];
      const bool here = next[c] < series.size() && series[next[c]].at.t == at.t;
      append_answer(row, here ? series[next[c]++].answer : Answer{}, plan.observables[rows[c]].unit);
    }
    table.rows.push_back(std::move(row));
  }
}

std::string bit_string(std::size_t index, std::size_t qubits) {
  std::string bits(qubits, '0');
  for (std::size_t q = 0; q < qubits; ++q) {
    if ((index >> (qubits - 1 - q)) & 1u) bits[q] = '1';
  }
  return bits;
}

void add_distribution(CsvTable& table, const Plan& plan, const PointOutcome& outcome) {
  for (std::size_t i = 0; i < outcome.distribution.size(); ++i) {
    std::vector<std::string> row = key_fields(plan, outcome.index);
    row.push_back(bit_string(i, plan.chip.qubits.size()));
    append_answer(row, outcome.distribution[i], kPlain);
    table.rows.push_back(std::move(row));
  }
}

ResultTables empty_tables(const Plan& plan) {
  ResultTables tables;
  CsvTable& results = tables["results.csv"];
  results.header = key_header(plan);
  if (plan.scan) results.header.push_back("s");
  append_header(results.header, plan, listed_rows(plan, false));
  results.header.push_back("status");
  if (const auto rows = listed_rows(plan, true); !rows.empty()) {
    CsvTable& traces = tables["traces.csv"];
    traces.header = key_header(plan);
    traces.header.push_back(column_name("t", kNanoseconds));
    traces.header.push_back("s");
    append_header(traces.header, plan, rows);
  }
  if (plan.distribution_at_end) {
    CsvTable& distribution = tables["distribution.csv"];
    distribution.header = key_header(plan);
    for (const char* name : {"bits", "probability", "probability error"}) distribution.header.push_back(name);
  }
  return tables;
}

// ---- reading back ----

/// Walks through the rows of one table: rows of one grid point stand together, in grid order.
class RowCursor {
 public:
  explicit RowCursor(const CsvTable* table) : table_(table) {}
  /// The rows that start with `keys`, as (first, count); the cursor moves behind them.
  std::span<const std::vector<std::string>> take(const std::vector<std::string>& keys, std::size_t at_most) {
    if (!table_) return {};
    const std::size_t first = next_;
    while (next_ < table_->rows.size() && next_ - first < at_most && starts_with(table_->rows[next_], keys)) ++next_;
    return std::span(table_->rows).subspan(first, next_ - first);
  }
  bool at_end() const { return !table_ || next_ == table_->rows.size(); }

 private:
  static bool starts_with(const std::vector<std::string>& row, const std::vector<std::string>& keys) {
    return row.size() >= keys.size() && std::equal(keys.begin(), keys.end(), row.begin());
  }
  const CsvTable* table_;
  std::size_t next_ = 0;
};

std::optional<Answer> read_answer(const std::vector<std::string>& row, std::size_t column, const DisplayUnit& unit) {
  const auto value = field_number(row[column]);
  const auto error = field_number(row[column + 1]);
  if (!value || !error) return std::nullopt;
  return Answer{*value * unit.factor, *error * unit.factor};
}

using Rows = std::span<const std::vector<std::string>>;

bool read_results(const Plan& plan, Rows rows, std::size_t keys, PointOutcome& outcome) {
  outcome.status = rows.front().back();
  const std::size_t first = keys + (plan.scan ? 1 : 0);
  const std::vector<std::size_t> listed = listed_rows(plan, false);
  for (std::size_t c = 0; c < listed.size(); ++c) {
    const Observable& observable = plan.observables[listed[c]];
    const std::size_t lines = occurrence_of(plan, observable) == Occurrence::scan ? rows.size() : 1;
    for (std::size_t k = 0; k < lines; ++k) {
      const auto answer = read_answer(rows[k], first + 2 * c, observable.unit);
      if (!answer) return false;
      const bool scanned = occurrence_of(plan, observable) == Occurrence::scan;
      outcome.series[listed[c]].push_back({{0, scanned ? plan.scan->s[k] : 0.0}, *answer});
    }
  }
  return true;
}

bool read_traces(const Plan& plan, Rows rows, std::size_t keys, PointOutcome& outcome) {
  const std::vector<std::size_t> listed = listed_rows(plan, true);
  for (const std::vector<std::string>& row : rows) {
    const auto t = field_number(row[keys]), s = field_number(row[keys + 1]);
    if (!t || !s) return false;
    for (std::size_t c = 0; c < listed.size(); ++c) {
      const std::size_t column = keys + 2 + 2 * c;
      if (row[column].empty() && row[column + 1].empty()) continue;
      const auto answer = read_answer(row, column, plan.observables[listed[c]].unit);
      if (!answer) return false;
      outcome.series[listed[c]].push_back({{*t, *s}, *answer});
    }
  }
  return true;
}

bool read_distribution(Rows rows, std::size_t keys, PointOutcome& outcome) {
  for (const std::vector<std::string>& row : rows) {
    const auto answer = read_answer(row, keys + 1, kPlain);
    if (!answer) return false;
    outcome.distribution.push_back(*answer);
  }
  return true;
}

void restore_error(PointOutcome& outcome) {
  const std::size_t colon = outcome.status.find(": ");
  if (colon == std::string::npos) return;
  outcome.error = RunError{outcome.status.substr(0, colon), outcome.status.substr(colon + 2)};
  outcome.series.clear();
  outcome.distribution.clear();
}

/// The value that its own text reads back as: the division and the product undo each other.
double as_read_back(double value, double factor) {
  for (int i = 0; i < 8 && std::isfinite(value); ++i) {
    const double again = value / factor * factor;
    if (again == value) break;
    value = again;
  }
  return value;
}

struct Cursors {
  RowCursor results, traces, bits;
};

/// Upper limit of the trace rows of a point.
std::size_t most_instants(const Plan& plan) {
  std::size_t count = 0;
  for (const Observable& observable : plan.observables) {
    if (const Along* along = std::get_if<Along>(&observable.moment)) count += along->samples;
  }
  return count;
}

/// False if the point's rows are missing or incomplete; `misfit` names a file that cannot be read.
bool read_point(const Plan& plan, Cursors& cursors, PointOutcome& outcome, const char*& misfit) {
  const std::vector<std::string> keys = key_fields(plan, outcome.index);
  const std::size_t lines = plan.scan ? plan.scan->s.size() : 1;
  const Rows rows = cursors.results.take(keys, lines);
  if (rows.size() != lines || lines == 0) return false;
  outcome.series.resize(plan.observables.size());
  if (!read_results(plan, rows, keys.size(), outcome)) misfit = "results.csv";
  restore_error(outcome);
  if (outcome.error) return true;
  const Rows trace = cursors.traces.take(keys, most_instants(plan));
  if (!read_traces(plan, trace, keys.size(), outcome)) misfit = "traces.csv";
  const std::size_t strings = plan.distribution_at_end ? std::size_t{1} << plan.chip.qubits.size() : 0;
  const Rows bits = cursors.bits.take(keys, strings);
  if (!read_distribution(bits, keys.size(), outcome)) misfit = "distribution.csv";
  const std::vector<std::size_t> traced = listed_rows(plan, true);
  return bits.size() == strings && std::none_of(traced.begin(), traced.end(), [&](std::size_t o) {
           return outcome.series[o].empty();
         });
}

}  // namespace

std::string column_name(const std::string& name, const DisplayUnit& unit) {
  return unit.label.empty() ? name : fmt::format("{} [{}]", name, unit.label);
}

std::string parameter_text(double value, const DisplayUnit& unit) {
  const double exact = value / unit.factor;
  const auto tidy = field_number(fmt::format("{:.15g}", exact));
  const bool means_the_same = tidy && std::abs(*tidy * unit.factor - value) <= 4e-16 * std::abs(value);
  return number_text(means_the_same ? *tidy : exact);
}

ResultTables make_tables(std::span<const PointOutcome* const> outcomes, std::span<const Plan* const> plan_of,
                         const Plan& plan) {
  TARN_CHECK(outcomes.size() == plan_of.size());
  ResultTables tables = empty_tables(plan);
  for (std::size_t i = 0; i < outcomes.size(); ++i) {
    add_results(tables["results.csv"], *plan_of[i], *outcomes[i]);
    if (tables.contains("traces.csv")) add_traces(tables["traces.csv"], *plan_of[i], *outcomes[i]);
    if (tables.contains("distribution.csv")) add_distribution(tables["distribution.csv"], *plan_of[i], *outcomes[i]);
  }
  return tables;
}

Result<std::map<std::uint64_t, PointOutcome>, std::string> read_tables(
    const ResultTables& tables, std::span<const std::uint64_t> indices, std::span<const Plan* const> plan_of) {
  std::map<std::uint64_t, PointOutcome> outcomes;
  if (indices.empty()) return outcomes;
  const ResultTables expected = empty_tables(*plan_of.front());
  for (const auto& [name, table] : expected) {
    const auto found = tables.find(name);
    if (found == tables.end() || found->second.header != table.header) return Unexpected{name};
  }
  const auto table_of = [&](const char* name) { return expected.contains(name) ? &tables.at(name) : nullptr; };
  Cursors cursors{RowCursor(table_of("results.csv")), RowCursor(table_of("traces.csv")),
                  RowCursor(table_of("distribution.csv"))};
  for (std::size_t i = 0; i < indices.size(); ++i) {
    PointOutcome outcome;
    outcome.index = indices[i];
    outcome.row = row_of(*plan_of[i], indices[i], choice_of(*plan_of[i]));
    const char* misfit = nullptr;
    if (read_point(*plan_of[i], cursors, outcome, misfit)) outcomes[outcome.row] = std::move(outcome);
    if (misfit) return Unexpected{std::string(misfit)};
  }
  if (!cursors.results.at_end()) return Unexpected{std::string("results.csv")};
  return outcomes;
}

void round_to_shown(const Plan& plan, PointOutcome& outcome) {
  for (std::size_t o = 0; o < outcome.series.size(); ++o) {
    const double factor = plan.observables[o].unit.factor;
    for (Sample& sample : outcome.series[o]) {
      sample.answer.value = as_read_back(sample.answer.value, factor);
      sample.answer.error = as_read_back(sample.answer.error, factor);
    }
  }
}

}  // namespace tarn::runtime
