#include "compiler/driver/messages.h"

#include <fmt/format.h>
#include <unistd.h>

#include <cstdio>
#include <cstdlib>
#include <nlohmann/json.hpp>
#include <optional>

#include "lang/diagnostics/render.h"
#include "lang/source/utf8.h"

namespace tarn::compiler {
namespace {

/// The byte where character `column`, counted from 1, of the line begins; the line's end if it is shorter.
std::uint32_t offset_of(const SourceFile& file, std::uint32_t line, std::uint32_t column) {
  const std::string_view text = line_text(file, line);
  std::size_t at = 0;
  for (std::uint32_t c = 1; c < column && at < text.size(); ++c) {
    at += std::max<std::size_t>(1, decode_utf8(text.substr(at)).length);
  }
  return file.line_starts[line - 1] + static_cast<std::uint32_t>(at);
}

std::optional<Span> span_of(const Place& place, const SourceSet& sources) {
  for (std::uint32_t id = 0; id < sources.size(); ++id) {
    const SourceFile& file = sources.file(FileId{id});
    if (file.name != place.file || place.line == 0 || place.line > file.line_starts.size()) continue;
    return Span{file.id, offset_of(file, place.line, place.column), offset_of(file, place.line, place.column_end + 1)};
  }
  return std::nullopt;
}

std::string render_placeless(const Message& message, bool json, bool colour) {
  if (json) {
    const nlohmann::ordered_json object{{"kind", message.kind},
                                        {"severity", to_text(message.severity)},
                                        {"message", message.text},
                                        {"remedy", message.remedy},
                                        {"file", nullptr}};
    return object.dump(-1, ' ', false, nlohmann::json::error_handler_t::replace) + "\n";
  }
  const char* code = message.severity == Severity::error ? "1;31" : message.severity == Severity::warning ? "1;33" : "1;36";
  const std::string title = fmt::format("{}[{}]", to_text(message.severity), message.kind);
  std::string text = colour ? fmt::format("tarn: \x1b[{}m{}\x1b[0m: {}\n", code, title, message.text)
                            : fmt::format("tarn: {}: {}\n", title, message.text);
  if (!message.remedy.empty()) text += fmt::format("    remedy: {}\n", message.remedy);
  return text;
}

}  // namespace

std::string render_message(const Message& message, const SourceSet* sources, bool json, bool colour) {
  const auto span = sources != nullptr ? span_of(message.place, *sources) : std::nullopt;
  if (!span) return render_placeless(message, json, colour);
  const Diagnostic diagnostic{message.kind, message.severity, *span, message.text, message.remedy, {}};
  return json ? render_json(diagnostic, *sources) : render(diagnostic, *sources, {.colour = colour});
}

void show(const Message& message, bool json, const SourceSet* sources) {
  const std::string text = render_message(message, sources, json, colour_wanted());
  std::fwrite(text.data(), 1, text.size(), stderr);
}

bool colour_wanted() {
  const char* no_colour = std::getenv("NO_COLOR");
  return isatty(STDERR_FILENO) != 0 && (no_colour == nullptr || *no_colour == '\0');
}

}  // namespace tarn::compiler
