#pragma once
/// \file Diagnostics as text: for a terminal and as JSON lines.

#include <string>

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/source_set.h"

namespace tarn {

struct RenderStyle {
  bool colour = false;     ///< ANSI escape sequences; nothing else depends on it.
  unsigned tab_width = 4;  ///< Columns a tab of the excerpt is shown as.
};

/// Place, severity and kind, message; the line with the part marked; what would mend
/// it; other places. Ends with a newline:
///
///     ring.tarn:3:23-27: error[dimension_mismatch]: expected a time, found a frequency: 3 GHz
///         parameter ta : time = 3 GHz
///                               ^^^^^
///         remedy: ...
///
/// Of a long line the part around the mark is shown. Control characters of the text
/// are shown as U+FFFD, so that a model cannot write to the terminal.
std::string render(const Diagnostic& diagnostic, const SourceSet& sources, const RenderStyle& style = {});

/// All reports in reading order, and how many were left out.
std::string render(const Diagnostics& diagnostics, const SourceSet& sources, const RenderStyle& style = {});

/// One JSON object on one line, with a newline: kind, severity, message, remedy, file,
/// line, column, line_end, column_end (last character marked), begin and end (bytes),
/// excerpt, notes. Columns count characters from 1.
std::string render_json(const Diagnostic& diagnostic, const SourceSet& sources);
std::string render_json(const Diagnostics& diagnostics, const SourceSet& sources);

}  // namespace tarn
