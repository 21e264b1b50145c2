#include "lang/diagnostics/render.h"

#include <algorithm>
#include <nlohmann/json.hpp>

#include "lang/source/utf8.h"

namespace tarn {
namespace {

constexpr std::string_view kIndent = "    ";
constexpr std::string_view kReplacement = "\xEF\xBF\xBD";
constexpr std::size_t kShownBefore = 70;  ///< Bytes shown on either side of a mark's start.
constexpr std::size_t kShownAfter = 60;

/// One character of the excerpt: what is printed and how wide it is.
struct Cell {
  std::string text;
  unsigned width = 1;
  bool marked = false;
};

Cell next_cell(std::string_view rest, unsigned tab_width, std::size_t& length) {
  const Decoded c = decode_utf8(rest);
  length = std::max<std::size_t>(c.length, 1);
  if (rest.front() == '\t') return {std::string(tab_width, ' '), tab_width, false};
  const bool control = c.code_point < 0x20 || (c.code_point >= 0x7F && c.code_point < 0xA0);
  if (c.length == 0 || control) return {std::string(kReplacement), 1, false};
  return {std::string(rest.substr(0, length)), terminal_width(c.code_point), false};
}

Cell ellipsis() { return {"...", 3, false}; }

/// Where the character begins that holds the byte at `offset`.
std::size_t character_start(std::string_view text, std::size_t offset) {
  while (offset > 0 && offset < text.size() && (static_cast<unsigned char>(text[offset]) & 0xC0U) == 0x80U) --offset;
  return offset;
}

/// The first line of the span, cut into cells; of a long line the part around the
/// start of the mark. An empty span marks the cell at its place.
std::vector<Cell> cells_of(const SourceFile& file, Span span, unsigned tab_width) {
  const std::uint32_t line = line_of(file, span.begin);
  const std::string_view text = line_text(file, line);
  const std::size_t begin = file.line_starts[line - 1];
  const std::size_t mark = std::max<std::size_t>(span.begin, begin) - begin;
  const std::size_t first = mark > kShownBefore ? character_start(text, mark - kShownBefore) : 0;
  const std::size_t last = std::min(text.size(), mark + kShownAfter);
  std::vector<Cell> cells;
  if (first > 0) cells.push_back(ellipsis());
  bool any = false;
  for (std::size_t at = first; at < last;) {
    std::size_t length = 0;
    Cell cell = next_cell(text.substr(at), tab_width, length);
    const std::size_t offset = begin + at;
    cell.marked = offset < std::max(span.end, span.begin + 1) && offset + length > span.begin;
    any = any || cell.marked;
    cells.push_back(std::move(cell));
    at += length;
  }
  if (last < text.size()) cells.push_back(ellipsis());
  if (!any) cells.push_back({" ", 1, true});
  return cells;
}

struct Paint {
  bool on;
  std::string operator()(std::string_view code, std::string_view text) const {
    if (!on) return std::string(text);
    return fmt::format("\x1b[{}m{}\x1b[0m", code, text);
  }
};

std::string_view colour_of(Severity severity) {
  switch (severity) {
    case Severity::error: return "1;31";
    case Severity::warning: return "1;33";
    case Severity::remark: return "1;36";
  }
  return "1";
}

std::string excerpt(const SourceFile& file, Span span, const RenderStyle& style, std::string_view colour) {
  if (file.text.empty()) return {};
  const std::vector<Cell> cells = cells_of(file, span, style.tab_width);
  std::string line;
  std::string marks;
  std::string gap;
  for (const Cell& cell : cells) {
    line += cell.text;
    if (cell.marked) {
      marks += gap + std::string(cell.width, '^');
      gap.clear();
    } else {
      gap += std::string(cell.width, ' ');
    }
  }
  line.erase(line.find_last_not_of(' ') + 1);
  const auto caret = marks.find('^');
  const Paint paint{style.colour};
  return fmt::format("{0}{1}\n{0}{2}{3}\n", kIndent, line, marks.substr(0, caret),
                     paint(colour, caret == std::string::npos ? "" : marks.substr(caret)));
}

std::string printable(std::string_view text) {
  std::string result;
  while (!text.empty()) {
    std::size_t length = 0;
    result += next_cell(text, 1, length).text;
    text.remove_prefix(length);
  }
  return result;
}

std::string place_text(const SourceSet& sources, Span span) {
  const Place place = sources.place(span);
  const std::string columns = place.column_end > place.column ? fmt::format("{}-{}", place.column, place.column_end)
                                                              : fmt::format("{}", place.column);
  return fmt::format("{}:{}:{}", printable(place.file), place.line, columns);
}

nlohmann::ordered_json place_json(const SourceSet& sources, Span span) {
  const LineColumn from = sources.position(span.file, span.begin);
  const LineColumn to = sources.position(span.file, span.end);
  const bool empty = span.end <= span.begin;
  return {{"file", sources.file(span.file).name},
          {"line", from.line},
          {"column", from.column},
          {"line_end", to.line},
          {"column_end", empty ? from.column : std::max(to.column, 2U) - 1},
          {"begin", span.begin},
          {"end", span.end}};
}

}  // namespace

std::string render(const Diagnostic& diagnostic, const SourceSet& sources, const RenderStyle& style) {
  const Paint paint{style.colour};
  const std::string_view colour = colour_of(diagnostic.severity);
  const std::string title = fmt::format("{}[{}]", to_text(diagnostic.severity), diagnostic.kind);
  std::string text = fmt::format("{}: {}: {}\n", place_text(sources, diagnostic.span), paint(colour, title),
                                 paint("1", printable(diagnostic.message)));
  text += excerpt(sources.file(diagnostic.span.file), diagnostic.span, style, colour);
  if (!diagnostic.remedy.empty()) text += fmt::format("{}remedy: {}\n", kIndent, printable(diagnostic.remedy));
  for (const SecondarySpan& other : diagnostic.notes) {
    text += fmt::format("  {}: {}\n", place_text(sources, other.span), printable(other.note));
    text += excerpt(sources.file(other.span.file), other.span, style, "1;36");
  }
  return text;
}

std::string render(const Diagnostics& diagnostics, const SourceSet& sources, const RenderStyle& style) {
  std::string text;
  for (const Diagnostic& diagnostic : in_text_order(diagnostics)) text += render(diagnostic, sources, style);
  if (diagnostics.dropped() > 0) text += fmt::format("{} more not shown\n", diagnostics.dropped());
  return text;
}

std::string render_json(const Diagnostic& diagnostic, const SourceSet& sources) {
  nlohmann::ordered_json json{{"kind", diagnostic.kind},
                              {"severity", to_text(diagnostic.severity)},
                              {"message", diagnostic.message},
                              {"remedy", diagnostic.remedy}};
  json.update(place_json(sources, diagnostic.span));
  const SourceFile& file = sources.file(diagnostic.span.file);
  constexpr std::size_t kLongestExcerpt = 1000;
  json["excerpt"] = line_text(file, line_of(file, diagnostic.span.begin)).substr(0, kLongestExcerpt);
  json["notes"] = nlohmann::ordered_json::array();
  for (const SecondarySpan& other : diagnostic.notes) {
    nlohmann::ordered_json note{{"message", other.note}};
    note.update(place_json(sources, other.span));
    json["notes"].push_back(std::move(note));
  }
  return json.dump(-1, ' ', false, nlohmann::json::error_handler_t::replace) + "\n";
}

std::string render_json(const Diagnostics& diagnostics, const SourceSet& sources) {
  std::string text;
  for (const Diagnostic& diagnostic : in_text_order(diagnostics)) text += render_json(diagnostic, sources);
  return text;
}

}  // namespace tarn
