#include "runtime/experiment/csv.h"

#include <array>
#include <charconv>
#include <cmath>
#include <limits>

namespace tarn::runtime {
namespace {

void append_field(std::string& text, const std::string& field) {
  if (field.find_first_of(",\"\r\n") == std::string::npos) {
    text += field;
    return;
  }
  text += '"';
  for (const char c : field) {
    if (c == '"') text += '"';
    text += c;
  }
  text += '"';
}

void append_row(std::string& text, const std::vector<std::string>& row) {
  for (std::size_t i = 0; i < row.size(); ++i) {
    if (i > 0) text += ',';
    append_field(text, row[i]);
  }
  text += "\r\n";
}

/// Takes records off the front of a text.
class Reader {
 public:
  explicit Reader(std::string_view text) : text_(text) {}
  bool at_end() const { return next_ >= text_.size(); }
  /// False if a quoted field does not end.
  bool read_record(std::vector<std::string>& record) {
    record.assign(1, "");
    while (!at_end()) {
      const char c = text_[next_++];
      if (c == '"') {
        if (!read_quoted(record.back())) return false;
      } else if (c == ',') {
        record.emplace_back();
      } else if (c == '\n') {
        return true;
      } else if (c != '\r') {
        record.back() += c;
      }
    }
    return true;
  }

 private:
  bool read_quoted(std::string& field) {
    while (!at_end()) {
      const char c = text_[next_++];
      if (c != '"') {
        field += c;
      } else if (!at_end() && text_[next_] == '"') {
        field += '"';
        ++next_;
      } else {
        return true;
      }
    }
    return false;
  }

  std::string_view text_;
  std::size_t next_ = 0;
};

}  // namespace

std::string to_csv(const CsvTable& table) {
  std::string text;
  append_row(text, table.header);
  for (const std::vector<std::string>& row : table.rows) append_row(text, row);
  return text;
}

Result<CsvTable, std::string> parse_csv(std::string_view text) {
  Reader reader(text);
  CsvTable table;
  if (reader.at_end()) return Unexpected{std::string("the table is empty")};
  if (!reader.read_record(table.header)) return Unexpected{std::string("a quoted field does not end")};
  std::vector<std::string> record;
  while (!reader.at_end()) {
    if (!reader.read_record(record)) return Unexpected{std::string("a quoted field does not end")};
    if (record.size() != table.header.size()) {
      return Unexpected{"row " + std::to_string(table.rows.size() + 1) + " has " + std::to_string(record.size()) +
                        " fields, the header " + std::to_string(table.header.size())};
    }
    table.rows.push_back(record);
  }
  return table;
}

std::string number_text(double value) {
  if (std::isnan(value)) return "";
  std::array<char, 40> digits;
  const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), value);
  return std::string(digits.data(), end.ptr);
}

std::optional<double> field_number(std::string_view field) {
  if (field.empty()) return std::numeric_limits<double>::quiet_NaN();
  double value = 0;
  const auto end = std::from_chars(field.data(), field.data() + field.size(), value);
  if (end.ec != std::errc() || end.ptr != field.data() + field.size()) return std::nullopt;
  return value;
}

}  // namespace tarn::runtime
