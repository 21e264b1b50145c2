#pragma once
/// \file Messages of the program itself: about the command line, folders, kernels and runs. Those about a
/// model's text are made by lang/check; both go to standard error in one format, as text or as JSON lines.

#include <string>

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/source_set.h"
#include "lang/support/place.h"

namespace tarn::compiler {

/// Kinds have a line in lang/ERRORS.md.
struct Message {
  std::string kind;
  std::string text;  ///< Lower case, no full stop, code in backticks.
  std::string remedy = {};
  Severity severity = Severity::error;
  Place place = {};  ///< In one of the texts read; an empty file: nowhere.
};

/// `tarn: error[KIND]: TEXT` and a line with the remedy, or with a place as lang/diagnostics/render.h;
/// as JSON one object on one line, with `file` null where there is no place. Ends with LF.
std::string render_message(const Message& message, const SourceSet* sources, bool json, bool colour);

/// On standard error.
void show(const Message& message, bool json, const SourceSet* sources = nullptr);

/// True where standard error is a terminal and NO_COLOR is not set.
bool colour_wanted();

}  // namespace tarn::compiler
