#include "tests/golden/runner.h"

#include <algorithm>
#include <fmt/format.h>

#include <catch2/catch.hpp>

namespace tarn::golden {
namespace {

constexpr std::string_view kMark = "#!";

std::vector<std::string_view> lines_of(std::string_view text) {
  std::vector<std::string_view> lines;
  while (!text.empty()) {
    const auto end = std::min(text.find('\n'), text.size() - 1);
    lines.push_back(text.substr(0, end + 1));
    text.remove_prefix(end + 1);
  }
  return lines;
}

std::string columns(const Place& place) { return fmt::format("{}-{}", place.column, place.column_end); }

std::string report(const Diagnostic& diagnostic, const SourceSet& sources, FileId main) {
  const Place place = sources.place(diagnostic.span);
  const std::string where = diagnostic.span.file == main ? "" : fmt::format("{}:{}:", place.file, place.line);
  std::string text = fmt::format("{} {}{} {}[{}]: {}\n", kMark, where, columns(place), to_text(diagnostic.severity),
                                 diagnostic.kind, diagnostic.message);
  if (!diagnostic.remedy.empty()) text += fmt::format("{}   remedy: {}\n", kMark, diagnostic.remedy);
  for (const SecondarySpan& other : diagnostic.notes) {
    const Place there = sources.place(other.span);
    const std::string file = other.span.file == main ? "" : there.file + ":";
    text += fmt::format("{}   {}{}:{}: {}\n", kMark, file, there.line, columns(there), other.note);
  }
  return text;
}

}  // namespace

Options options_of(std::string_view text) {
  constexpr std::string_view kHead = "# options: ";
  Options options;
  if (!text.starts_with(kHead)) return options;
  std::string_view rest = text.substr(0, text.find('\n')).substr(kHead.size());
  while (!rest.empty()) {
    const std::size_t end = std::min(rest.find(" --"), rest.size());
    const std::string_view option = rest.substr(0, end);
    const std::size_t blank = option.find(' ');
    const std::string_view name = option.substr(0, blank);
    const std::string_view value = blank == std::string_view::npos ? "" : option.substr(blank + 1);
    const std::size_t equals = value.find('=');
    if (name == "--set" && equals != std::string_view::npos) {
      options.settings.emplace_back(value.substr(0, equals), value.substr(equals + 1));
    } else if (name == "--experiment") {
      options.experiment = value;
    } else {
      FAIL("a golden case has no such option: " << option);
    }
    rest.remove_prefix(std::min(end + 1, rest.size()));
  }
  return options;
}

std::string strip(std::string_view text) {
  std::string kept;
  for (const std::string_view line : lines_of(text)) {
    if (!line.starts_with(kMark)) kept += line;
  }
  return kept;
}

std::string annotate(const std::string& name, const std::string& text, const std::filesystem::path& folder,
                     const Stage& stage) {
  Diagnostics diagnostics;
  Modules modules = load_text(name, text, folder, {standard_library(), {}}, diagnostics);
  const FileId main = modules.modules.front().ast.file;
  const SourceSet sources = stage.run(std::move(modules), options_of(text), diagnostics);
  const std::vector<std::string_view> lines = lines_of(text);
  std::vector<std::string> after(lines.size() + 1);
  for (const Diagnostic& diagnostic : in_text_order(diagnostics)) {
    const bool here = diagnostic.span.file == main;
    const std::size_t line = here ? sources.position(main, diagnostic.span.begin).line : lines.size();
    after[std::min(line, lines.size())] += report(diagnostic, sources, main);
  }
  std::string result = after.front();
  for (std::size_t i = 0; i < lines.size(); ++i) {
    result += lines[i];
    if (!after[i + 1].empty() && !result.ends_with('\n')) result += '\n';
    result += after[i + 1];
  }
  return result;
}

std::vector<std::string> kinds_in(std::string_view annotated) {
  std::vector<std::string> kinds;
  for (const std::string_view line : lines_of(annotated)) {
    const auto open = line.find('[');
    const auto close = line.find("]: ");
    if (!line.starts_with(kMark) || open == std::string_view::npos || close == std::string_view::npos) continue;
    if (open < close) kinds.emplace_back(line.substr(open + 1, close - open - 1));
  }
  return kinds;
}

}  // namespace tarn::golden
