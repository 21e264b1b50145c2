#pragma once
/// \file Tables of text by RFC 4180, and numbers as text.

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "lang/support/result.h"

namespace tarn::runtime {

struct CsvTable {
  std::vector<std::string> header;
  std::vector<std::vector<std::string>> rows;  ///< Each as long as the header.
};

/// Lines end with CR LF; fields with a comma, a quote or a line end are quoted.
std::string to_csv(const CsvTable& table);

/// Reads what to_csv wrote (LF alone is accepted too). The error says what is wrong, in one sentence.
Result<CsvTable, std::string> parse_csv(std::string_view text);

/// The shortest decimal that reads back as the same double; empty for NaN, `inf`, `-inf`.
std::string number_text(double value);

/// The number a field holds; NaN for an empty one, none if it is not a number.
std::optional<double> field_number(std::string_view field);

}  // namespace tarn::runtime
