#pragma once
/// \file Golden cases: a text, and after each line the diagnostics reported on it.
///
///     parameter ta : time = 3 GHz
///     #! 23-27 error[dimension_mismatch]: expected a time, found a frequency: 3 GHz
///     #!   remedy: ...
///
/// A case whose first line is `# options: ...` is read as if the program had been given them:
///
///     # options: --set ta=5 us --experiment speed

#include <filesystem>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/loader.h"

namespace tarn::golden {

/// What the first line of a case asks for.
struct Options {
  std::vector<std::pair<std::string, std::string>> settings;  ///< `--set NAME=VALUE`, in order.
  std::string experiment;                                     ///< Empty: all.
};

/// Options of the first line; fails the test on one that is not known.
Options options_of(std::string_view text);

/// What is run on the cases of a folder below tests/golden, after loading and parsing.
/// Gives the texts back, for the places of the diagnostics.
struct Stage {
  std::string_view folder;
  SourceSet (*run)(Modules modules, const Options& options, Diagnostics& diagnostics);
};

/// All stages; a new phase adds its row in stages.cpp.
const std::vector<Stage>& stages();

/// The text without the lines that start with `#!`.
std::string strip(std::string_view text);

/// The case as it should read: `text` (stripped) with what the stage reports written in.
/// Reports on other files follow at the end, with the file's name.
std::string annotate(const std::string& name, const std::string& text, const std::filesystem::path& folder,
                     const Stage& stage);

/// Names of the kinds that an annotated text shows.
std::vector<std::string> kinds_in(std::string_view annotated);

}  // namespace tarn::golden
