#include "lang/source/source_set.h"

#include <algorithm>

#include "lang/support/check.h"

namespace tarn {
namespace {

constexpr std::string_view kByteOrderMark = "\xEF\xBB\xBF";

std::uint32_t characters(std::string_view text) {
  const auto is_lead = [](char c) { return (static_cast<unsigned char>(c) & 0xC0U) != 0x80U; };
  return static_cast<std::uint32_t>(std::count_if(text.begin(), text.end(), is_lead));
}

}  // namespace

SourceFile make_source(FileId id, std::string name, std::string text) {
  TARN_CHECK(text.size() < UINT32_MAX);
  // A byte order mark belongs to no line: columns count from the first character after it.
  const auto first = std::string_view(text).starts_with(kByteOrderMark) ? 3U : 0U;
  SourceFile file{id, std::move(name), std::move(text), {first}};
  for (std::uint32_t i = 0; i < file.text.size(); ++i) {
    if (file.text[i] == '\n') file.line_starts.push_back(i + 1);
  }
  return file;
}

const SourceFile& SourceSet::add(std::string name, std::string text) {
  const FileId id{static_cast<std::uint32_t>(files_.size())};
  return files_.emplace_back(make_source(id, std::move(name), std::move(text)));
}

const SourceFile& SourceSet::file(FileId id) const {
  TARN_CHECK(id.row < files_.size());
  return files_[id.row];
}

std::string_view SourceSet::text(Span span) const {
  const std::string_view all = file(span.file).text;
  TARN_CHECK(span.begin <= span.end && span.end <= all.size());
  return all.substr(span.begin, span.end - span.begin);
}

LineColumn SourceSet::position(FileId id, std::uint32_t offset) const {
  return tarn::position(file(id), offset);
}

Place SourceSet::place(Span span) const {
  const SourceFile& source = file(span.file);
  const LineColumn from = tarn::position(source, span.begin);
  const std::string_view line = line_text(source, from.line);
  const auto line_end = source.line_starts[from.line - 1] + static_cast<std::uint32_t>(line.size());
  const LineColumn to = tarn::position(source, std::max(span.begin, std::min(span.end, line_end)));
  return {source.name, from.line, from.column, std::max(from.column, to.column - 1)};
}

std::string_view line_text(const SourceFile& file, std::uint32_t line) {
  TARN_CHECK(line >= 1 && line <= file.line_starts.size());
  const std::uint32_t begin = file.line_starts[line - 1];
  const bool last = line == file.line_starts.size();
  const auto end = last ? file.text.size() : file.line_starts[line] - 1;
  std::string_view text = std::string_view(file.text).substr(begin, end - begin);
  if (text.ends_with('\r')) text.remove_suffix(1);
  return text;
}

std::uint32_t line_of(const SourceFile& file, std::uint32_t offset) {
  offset = std::max(offset, file.line_starts.front());
  const auto after = std::upper_bound(file.line_starts.begin(), file.line_starts.end(), offset);
  return static_cast<std::uint32_t>(after - file.line_starts.begin());
}

LineColumn position(const SourceFile& file, std::uint32_t offset) {
  TARN_CHECK(offset <= file.text.size());
  offset = std::max(offset, file.line_starts.front());
  const std::uint32_t line = line_of(file, offset);
  const std::uint32_t begin = file.line_starts[line - 1];
  return {line, characters(std::string_view(file.text).substr(begin, offset - begin)) + 1};
}

}  // namespace tarn
