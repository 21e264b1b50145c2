#include "lang/check/tables.h"

#include <algorithm>
#include <cmath>

#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/program/table.h"

namespace tarn {
namespace {

/// What a call of table(...) says.
struct TableCall {
  std::optional<std::string> file, x, y;
  Interpolation by = Interpolation::linear;
  bool valid = true;
};

std::optional<Interpolation> interpolation(std::string_view word) {
  if (word == "linear") return Interpolation::linear;
  if (word == "monotone") return Interpolation::monotone;
  if (word == "spline") return Interpolation::spline;
  if (word == "loglog") return Interpolation::loglog;
  return std::nullopt;
}

void read_by(Session& session, const Scope& scope, const ast::Given& given, TableCall& call) {
  if (interpolation(session.text(given.span).substr(session.text(given.span).find_last_of(" =") + 1))) {
    const std::string text = excerpt(session, span_of(session, scope, given.value));
    session.report(span_of(session, scope, given.value), diag::wrong_kind, "a text", text).remedy(fmt::format("`by = \"{}\"`", text));
    call.valid = false;
    return;
  }
  const auto word = evaluate_text(session, scope, given.value);
  if (!word) return;
  const auto by = interpolation(*word);
  if (!by) session.report(given.span, diag::table_by, *word);
  call.by = by.value_or(Interpolation::linear);
  call.valid = call.valid && by.has_value();
}

TableCall read_call(Session& session, const Scope& scope, const ast::Path& path) {
  TableCall call;
  std::vector<std::optional<std::string>> texts;
  for (const ast::Given& given : path.given) {
    if (given.name && given.name->text == "by") {
      read_by(session, scope, given, call);
    } else if (given.name) {
      session.report(given.name->span, diag::unknown_argument, "table", given.name->text);
      call.valid = false;
    } else {
      const Value value = evaluate(session, scope, given.value);
      const auto* text = value.get<TextValue>();
      if (text == nullptr && !value.unknown()) session.report(given.span, diag::wrong_kind, "a text", describe(value));
      call.valid = call.valid && text != nullptr;
      texts.push_back(text == nullptr ? std::nullopt : text->text);
    }
  }
  if (texts.size() != 3) {
    const bool by = texts.size() == 4 && texts[3] && interpolation(*texts[3]);
    session.report(path.span, diag::argument_count, "table", "3 texts", texts.size())
        .remedy(by ? fmt::format("`by = \"{}\"`", *texts[3]) : std::string());
    call.valid = false;
    return call;
  }
  call.file = texts[0];
  call.x = texts[1];
  call.y = texts[2];
  return call;
}

const Table* find_table(Session& session, const std::string& file, Span span) {
  return open_table(*session.program.loaded, file, span, session.diagnostics);
}

std::optional<Column> find_column(Session& session, const Table& table, const std::string& name, Span span) {
  return read_column(table, session.program.loaded->sources.file(table.file), name, span, session.diagnostics);
}

bool table_sound(Session& session, const TableData& data, const SourceFile& file, const std::vector<std::uint32_t>& lines, Span span) {
  if (data.x.size() < 2) {
    session.report(span, diag::table_short, data.name, counted(data.x.size(), "point"));
    return false;
  }
  for (std::size_t k = 0; k < data.x.size(); ++k) {
    if (k > 0 && !(data.x[k] > data.x[k - 1])) {
      session.report(span, diag::table_order, data.name, lines[k]).note(line_span(file, lines[k]), "this row");
      return false;
    }
    if (data.by == Interpolation::loglog && !(data.x[k] > 0 && data.y[k] > 0)) {
      session.report(span, diag::table_not_positive, data.name, lines[k]).note(line_span(file, lines[k]), "this row");
      return false;
    }
  }
  return true;
}

struct LoadedTable {
  TableData data;
  Dimension x, y;
  FileId file;
  std::vector<std::uint32_t> lines;  ///< Of the file, one for each point.
};

std::optional<LoadedTable> load(Session& session, const TableCall& call, Span span) {
  const Table* table = find_table(session, *call.file, span);
  if (table == nullptr) return std::nullopt;
  const auto x = find_column(session, *table, *call.x, span);
  // Where there is one column only, one message says what is wrong with the table.
  const auto y = x || table->header.size() > 1 ? find_column(session, *table, *call.y, span) : std::nullopt;
  if (!x || !y) return std::nullopt;
  LoadedTable loaded{{fmt::format("{}, column {}", table->name, y->name), x->values, y->values, call.by, true, span},
                     x->unit.unit.dimension, y->unit.unit.dimension, table->file, x->lines};
  const SourceFile& file = session.program.sources().file(table->file);
  return table_sound(session, loaded.data, file, x->lines, span) ? std::optional(loaded) : std::nullopt;
}

void remark_coverage(Session& session, const TableData& data, Dimension x, Span span) {
  const bool covers = data.hold_outside && std::abs(data.x.front()) < 1e-9 && std::abs(data.x.back() - 1) < 1e-9;
  if (covers || session.generic) return;
  const std::string low = format_quantity(data.x.front(), x);
  const std::string high = format_quantity(data.x.back(), x);
  const std::string outside = data.hold_outside ? "keeps its end value" : "is zero";
  const bool passes = data.hold_outside && x.is_number() && (data.x.front() < -1e-9 || data.x.back() > 1 + 1e-9);
  if (passes) {
    session.report(span, diag::table_beyond, data.name, low, high)
        .remedy(data.x.back() > 10 ? "divide the column by 100 if it counts percent" : "the rest of the table is not used");
  } else {
    session.report(span, diag::table_coverage, data.name, low, high, outside);
  }
  session.remark(fmt::format("{} covers {} to {}; outside it {}", data.name, low, high, outside));
}

/// The unit that a text names though not all of it is known: "A{i} [GHz]".
std::optional<Dimension> unit_of_text(const Session& session, const Scope& scope, ast::ExprId id) {
  const auto* text = std::get_if<ast::Text>(&session.ast(scope).expr(id).node);
  if (text == nullptr) return std::nullopt;
  const std::string& end = text->literals.back();
  const auto open = end.rfind('[');
  const auto close = end.rfind(']');
  if (open == std::string::npos || close == std::string::npos || close < open) return std::nullopt;
  const auto unit = parse_unit(std::string_view(end).substr(open + 1, close - open - 1));
  return unit ? std::optional(unit->dimension) : std::nullopt;
}

Value opaque_table(Session& session, const Scope& scope, const ast::Path& path) {
  std::size_t place = 0;
  for (const ast::Given& given : path.given) {
    if (given.name || place++ != 2) continue;
    const auto dimension = unit_of_text(session, scope, given.value);
    if (dimension) return number_value(opaque_number(session, "table", *dimension, path.span));
  }
  return {};
}

Value call_table(Session& session, const Scope& scope, const ast::Path& path) {
  if (scope.site == nullptr || !scope.site->table_argument) {
    session.report(path.span, diag::table_not_here).remedy("`schedule f(s) = table(...)`");
    return {};
  }
  const TableCall call = read_call(session, scope, path);
  if (!call.valid) return {};
  if (!call.file || !call.x || !call.y) return opaque_table(session, scope, path);
  const bool holds = scope.site->table_holds;
  const NodeId argument = *scope.site->table_argument;
  const std::string key = fmt::format("{} {} {}|{}|{}|{}|{}", path.span.file.row, path.span.begin, *call.file, *call.x, *call.y,
                                      static_cast<int>(call.by), holds);
  auto found = session.tables.find(key);
  if (found == session.tables.end()) {
    auto loaded = load(session, call, path.span);
    if (!loaded) return {};
    if (loaded->x != session.graph[argument].dimension) {
      session.report(path.span, diag::dimension_mismatch, session.graph[argument].dimension, loaded->x, *call.x);
      return {};
    }
    loaded->data.hold_outside = holds;
    remark_coverage(session, loaded->data, loaded->x, path.span);
    const auto row = static_cast<std::uint32_t>(session.graph.tables.size());
    session.graph.tables.push_back(std::move(loaded->data));
    found = session.tables.emplace(key, Session::TableRow{row, loaded->y}).first;
  }
  return number_value(session.graph.add({.op = NodeOp::table, .a = argument, .index = found->second.row,
                                         .dimension = found->second.dimension, .span = path.span}));
}

std::vector<Value> column_values(Session& session, const Column& column, Span span) {
  const bool counts = column.unit.text.empty() && std::all_of(column.values.begin(), column.values.end(), [](double x) {
                        return x == std::floor(x) && std::abs(x) < 9e15;
                      });
  std::vector<Value> values;
  for (const double x : column.values) {
    values.push_back(counts ? count_value(static_cast<std::int64_t>(x))
                            : number_value(session.graph.constant(x, column.unit.unit.dimension, span)));
  }
  return values;
}

std::optional<std::vector<std::string>> text_arguments(Session& session, const Scope& scope, const ast::Path& path,
                                                       std::size_t count) {
  const std::string& name = path.steps.front().name.text;
  const bool named = std::any_of(path.given.begin(), path.given.end(), [](const ast::Given& given) { return given.name.has_value(); });
  if (path.given.size() != count || named) {
    session.report(path.span, diag::argument_count, name, fmt::format("{} text{}", count, count == 1 ? "" : "s"), path.given.size());
    return std::nullopt;
  }
  std::vector<std::string> texts;
  for (const ast::Given& given : path.given) {
    const auto text = evaluate_text(session, scope, given.value);
    if (!text) return std::nullopt;
    texts.push_back(*text);
  }
  return texts;
}

Value call_column(Session& session, const Scope& scope, const ast::Path& path) {
  const auto texts = text_arguments(session, scope, path, 2);
  const Table* table = texts ? find_table(session, (*texts)[0], path.span) : nullptr;
  const auto column = table != nullptr ? find_column(session, *table, (*texts)[1], path.span) : std::nullopt;
  if (!column) return {};
  return {ListValue{std::make_shared<const std::vector<Value>>(column_values(session, *column, path.span))}};
}

Value call_rows(Session& session, const Scope& scope, const ast::Path& path) {
  const auto texts = text_arguments(session, scope, path, 1);
  const Table* table = texts ? find_table(session, (*texts)[0], path.span) : nullptr;
  if (table == nullptr) return {};
  RowsValue result;
  std::vector<std::vector<Value>> rows(table->rows());
  for (const std::string& name : table->header) {
    const auto column = find_column(session, *table, name, path.span);
    if (!column) return {};
    result.names.push_back(column->name);
    const auto values = column_values(session, *column, path.span);
    for (std::size_t k = 0; k < rows.size(); ++k) rows[k].push_back(values[k]);
  }
  result.rows = std::make_shared<const std::vector<std::vector<Value>>>(std::move(rows));
  return {std::move(result)};
}

Value call_list(Session& session, const Scope& scope, const ast::Path& path) {
  std::vector<Value> items;
  for (const ast::Given& given : path.given) {
    if (given.name) session.report(given.name->span, diag::unknown_argument, "list", given.name->text);
    items.push_back(evaluate(session, scope, given.value));
  }
  return {ListValue{std::make_shared<const std::vector<Value>>(std::move(items))}};
}

}  // namespace

bool is_table_function(std::string_view name) {
  return name == "table" || name == "column" || name == "rows" || name == "list";
}

Value call_table_function(Session& session, const Scope& scope, const ast::Path& path) {
  const std::string& name = path.steps.front().name.text;
  if (name == "table") return call_table(session, scope, path);
  if (name == "column") return call_column(session, scope, path);
  return name == "rows" ? call_rows(session, scope, path) : call_list(session, scope, path);
}

std::optional<TableData> read_waveform(Session& session, const Scope& scope, const ast::Path& path) {
  const bool table = path.steps.size() == 1 && path.steps.front().name.text == "table" && path.call;
  if (!table) {
    session.report(path.span, diag::waveform_form).remedy("`follow table(\"pace.csv\", \"t [ns]\", \"s\")`");
    return std::nullopt;
  }
  const TableCall call = read_call(session, scope, path);
  if (!call.valid || !call.file || !call.x || !call.y) return std::nullopt;
  if (call.by != Interpolation::linear) session.report(path.span, diag::waveform_form);
  const auto loaded = load(session, call, path.span);
  if (!loaded) return std::nullopt;
  const bool fits = loaded->x == kTime && loaded->y == kNumber;
  if (loaded->x != kTime) session.report(path.span, diag::dimension_mismatch, kTime, loaded->x, *call.x);
  if (loaded->y != kNumber) session.report(path.span, diag::dimension_mismatch, kNumber, loaded->y, *call.y);
  if (!fits) return std::nullopt;
  const auto& s = loaded->data.y;
  const auto beyond = std::find_if(s.begin(), s.end(), [](double value) { return !(value >= 0 && value <= 1); });
  if (beyond != s.end()) {
    const std::uint32_t line = loaded->lines[static_cast<std::size_t>(beyond - s.begin())];
    session.report(path.span, diag::pace_outside, *beyond).note(line_span(session.program.sources().file(loaded->file), line), "this row");
  }
  return loaded->data;
}

Value opaque_item(Session& session, const ListValue& list, Span span) {
  if (list.items->empty()) return {};
  const Value& first = list.items->front();
  if (first.get<CountValue>()) return {CountValue{std::nullopt, opaque_number(session, "item", kNumber, span)}};
  const auto* number = first.get<NumberValue>();
  if (number == nullptr) return {};
  return number_value(opaque_number(session, "item", session.graph[number->node].dimension, span));
}

}  // namespace tarn
