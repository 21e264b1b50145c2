#include "lang/source/table_file.h"

#include <csv.h>

#include <algorithm>
#include <charconv>
#include <cmath>

#include "lang/support/near.h"

namespace tarn {
namespace {

/// Rows as libcsv finds them.
struct Reading {
  std::vector<std::string> row;
  std::vector<std::uint32_t> row_lines;
  std::uint32_t line = 0;
  std::uint32_t row_begin = 1;  ///< Line where the row at hand begins.
  bool row_ended = true;
  std::optional<std::uint32_t> ragged_line;
  std::size_t ragged_cells = 0;
  Table table;

  void end_row() {
    row_ended = true;
    if (table.header.empty()) {
      table.header = std::move(row);
    } else if (row.size() != table.header.size()) {
      if (!ragged_line) ragged_cells = row.size();
      if (!ragged_line) ragged_line = line;
    } else {
      std::move(row.begin(), row.end(), std::back_inserter(table.cells));
      table.cell_lines.insert(table.cell_lines.end(), row_lines.begin(), row_lines.end());
    }
    row.clear();
    row_lines.clear();
  }
};

void on_field(void* text, std::size_t size, void* data) {
  auto& reading = *static_cast<Reading*>(data);
  reading.row.emplace_back(text == nullptr ? std::string_view() : std::string_view(static_cast<const char*>(text), size));
  reading.row_lines.push_back(reading.line);
}

void on_row(int, void* data) { static_cast<Reading*>(data)->end_row(); }

/// Frees what libcsv holds.
class Parser {
 public:
  Parser() { csv_init(&parser_, CSV_STRICT | CSV_STRICT_FINI); }
  Parser(const Parser&) = delete;
  Parser& operator=(const Parser&) = delete;
  ~Parser() { csv_free(&parser_); }
  bool feed(std::string_view text, Reading& reading) {
    return csv_parse(&parser_, text.data(), text.size(), on_field, on_row, &reading) == text.size();
  }
  bool finish(Reading& reading) { return csv_fini(&parser_, on_field, on_row, &reading) == 0; }

 private:
  csv_parser parser_{};
};

/// Feeds line by line, so that each cell knows its line. False if quotes do not match.
bool read_lines(const SourceFile& file, Reading& reading) {
  Parser parser;
  const std::string_view text = file.text;
  for (std::uint32_t line = 1; line <= file.line_starts.size(); ++line) {
    const std::string_view content = line_text(file, line);
    const bool between_rows = reading.row_ended;
    if (between_rows && (content.starts_with('#') || content.find_first_not_of(" \t") == std::string_view::npos)) continue;
    reading.line = line;
    if (between_rows) reading.row_begin = line;
    reading.row_ended = false;
    const std::uint32_t begin = file.line_starts[line - 1];
    const std::size_t end = line < file.line_starts.size() ? file.line_starts[line] : text.size();
    if (!parser.feed(text.substr(begin, end - begin), reading)) return false;
  }
  return parser.finish(reading);
}

std::optional<std::string> twice(std::vector<std::string> names) {
  std::sort(names.begin(), names.end());
  const auto found = std::adjacent_find(names.begin(), names.end());
  if (found == names.end()) return std::nullopt;
  return *found;
}

std::string list_columns(const Table& table) {
  constexpr std::size_t kMost = 12;
  std::string text = "it has ";
  for (std::size_t i = 0; i < std::min(kMost, table.header.size()); ++i) {
    text += (i > 0 ? ", `" : "`") + table.header[i] + "`";
  }
  return table.header.size() > kMost ? text + ", ..." : text;
}

std::optional<std::size_t> find_column(const Table& table, std::string_view wanted) {
  const auto exact = std::find(table.header.begin(), table.header.end(), wanted);
  if (exact != table.header.end()) return static_cast<std::size_t>(exact - table.header.begin());
  const std::string_view name = split_header(wanted).name;
  for (std::size_t i = 0; i < table.header.size(); ++i) {
    if (split_header(table.header[i]).name == name) return i;
  }
  return std::nullopt;
}

/// What the cells of the column stand in; nothing after a report.
std::optional<NamedUnit> column_unit(const Table& table, const std::string& header, std::string_view wanted, Span asked,
                                     Diagnostics& diagnostics) {
  std::optional<NamedUnit> result;
  for (const std::string_view cell : {wanted, std::string_view(header)}) {
    const HeaderCell parts = split_header(cell);
    if (!parts.has_unit) continue;
    const auto unit = parse_unit(parts.unit);
    if (!unit) {
      auto tail = diagnostics.report(asked, diag::table_unit, parts.unit, cell, table.name);
      if (!unit.error().near.empty()) tail.remedy("did you mean `" + unit.error().near + "`?");
      return std::nullopt;
    }
    if (result && *unit != result->unit) {
      diagnostics.report(asked, diag::table_units_differ, result->text, table.name, parts.unit);
      return std::nullopt;
    }
    if (!result) result = NamedUnit{std::string(parts.unit), *unit};
  }
  return result ? result : NamedUnit{};
}

std::optional<double> number_of(std::string_view cell) {
  if (cell.starts_with('+') && !cell.starts_with("+-")) cell.remove_prefix(1);
  double value = 0;
  const auto [end, error] = std::from_chars(cell.data(), cell.data() + cell.size(), value);
  if (error != std::errc() || end != cell.data() + cell.size() || !std::isfinite(value)) return std::nullopt;
  return value;
}

}  // namespace

Span line_span(const SourceFile& file, std::uint32_t line) {
  const std::uint32_t begin = file.line_starts[line - 1];
  return {file.id, begin, begin + static_cast<std::uint32_t>(line_text(file, line).size())};
}

std::optional<Table> parse_table(const SourceFile& file, Span asked, Diagnostics& diagnostics) {
  Reading reading;
  reading.table.file = file.id;
  reading.table.name = file.name;
  if (!read_lines(file, reading)) {
    diagnostics.report(asked, diag::table_quotes, std::size_t{reading.row_begin}, file.name)
        .note(line_span(file, reading.row_begin), "this row");
    return std::nullopt;
  }
  const Table& table = reading.table;
  if (table.header.empty()) {
    diagnostics.report(asked, diag::table_empty, file.name, "header line");
    return std::nullopt;
  }
  if (reading.ragged_line) {
    diagnostics.report(asked, diag::table_ragged, std::size_t{*reading.ragged_line}, file.name, reading.ragged_cells, table.header.size())
        .note(line_span(file, *reading.ragged_line), "this row");
    return std::nullopt;
  }
  if (const auto name = twice(table.header)) {
    diagnostics.report(asked, diag::table_duplicate, file.name, *name);
    return std::nullopt;
  }
  if (table.cells.empty()) {
    diagnostics.report(asked, diag::table_empty, file.name, "rows");
    return std::nullopt;
  }
  return std::move(reading.table);
}

std::optional<Column> read_column(const Table& table, const SourceFile& file, std::string_view wanted, Span asked,
                                  Diagnostics& diagnostics) {
  const std::optional<std::size_t> index = find_column(table, wanted);
  if (!index) {
    const std::string_view near = near_word(wanted, table.header);
    const std::string& first = table.header.front();
    const bool joined = table.header.size() == 1 && first.find_first_of(";\t") != std::string::npos;
    const std::string bracket = std::string(split_header(wanted).name) + " (";
    const bool round = std::any_of(table.header.begin(), table.header.end(), [&](const std::string& cell) { return cell.starts_with(bracket); });
    if (joined || round) {
      diagnostics.report(asked, diag::table_no_column, table.name, wanted)
          .remedy(joined ? "cells are parted by commas" : list_columns(table) + "; units stand in `[ ]`: `A [GHz]`");
      return std::nullopt;
    }
    diagnostics.report(asked, diag::table_no_column, table.name, wanted)
        .remedy(list_columns(table) + (near.empty() ? "" : "; did you mean `" + std::string(near) + "`?"));
    return std::nullopt;
  }
  const std::string& header = table.header[*index];
  const std::optional<NamedUnit> unit = column_unit(table, header, wanted, asked, diagnostics);
  if (!unit) return std::nullopt;
  Column column{std::string(split_header(header).name), *unit, {}, {}};
  for (std::size_t row = 0; row < table.rows(); ++row) {
    const std::string& cell = table.cell(row, *index);
    const std::uint32_t line = table.line(row, *index);
    const std::optional<double> value = number_of(cell);
    if (!value && cell.empty()) {
      diagnostics.report(asked, diag::table_hole, std::size_t{line}, table.name, header).note(line_span(file, line), "this row");
      return std::nullopt;
    }
    if (!value) {
      diagnostics.report(asked, diag::table_not_number, cell, std::size_t{line}, table.name).note(line_span(file, line), "this row");
      return std::nullopt;
    }
    column.values.push_back(*value * unit->unit.factor);
    column.lines.push_back(line);
  }
  return column;
}

}  // namespace tarn
