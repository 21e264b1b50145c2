#pragma once
/// \file Tables: CSV text (RFC 4180) with a header line; lines that start with `#` are
/// skipped, as are empty ones.

#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "lang/diagnostics/diagnostics.h"
#include "lang/quantities/units.h"
#include "lang/source/source_set.h"

namespace tarn {

/// Cells as text, row by row; every row is as long as the header.
struct Table {
  FileId file;
  std::string name;  ///< The file's, as shown.
  std::vector<std::string> header;
  std::vector<std::string> cells;          ///< Row-major.
  std::vector<std::uint32_t> cell_lines;   ///< Line of the file where each cell ends.

  std::size_t rows() const { return header.empty() ? 0 : cells.size() / header.size(); }
  const std::string& cell(std::size_t row, std::size_t column) const { return cells[row * header.size() + column]; }
  std::uint32_t line(std::size_t row, std::size_t column) const { return cell_lines[row * header.size() + column]; }
};

/// A column in internal units.
struct Column {
  std::string name;  ///< Without the unit.
  NamedUnit unit;    ///< What the cells stand in.
  std::vector<double> values;
  std::vector<std::uint32_t> lines;
};

/// The line of a table as a place to show beside a message.
Span line_span(const SourceFile& file, std::uint32_t line);

/// Errors, reported at `asked` with the table's line beside: quotes that do not match,
/// rows longer or shorter than the header, two columns of one name, no header, no rows.
std::optional<Table> parse_table(const SourceFile& file, Span asked, Diagnostics& diagnostics);

/// The column `wanted`, written `name` or `name [unit]`; the unit may stand there, in the
/// header, or in both if they agree. Errors, reported at `asked`: no such column, a hole,
/// a cell that is no finite number, an unknown unit, units that differ.
std::optional<Column> read_column(const Table& table, const SourceFile& file, std::string_view wanted, Span asked,
                                  Diagnostics& diagnostics);

}  // namespace tarn
