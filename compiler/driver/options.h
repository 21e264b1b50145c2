#pragma once
/// \file The command line, parsed: what the user asked for.

#include <cstdint>
#include <optional>
#include <string>
#include <variant>
#include <vector>

namespace tarn::compiler {

/// --set NAME=VALUE; VALUE is an expression of the language: 5 GHz.
struct Override {
  std::string name, value;
};

/// What every command that reads a model takes.
struct ModelOptions {
  std::string file;
  std::vector<std::string> also_read;  ///< Folders beside the model's that may be read.
  std::vector<Override> overrides;
  bool json_diagnostics = false;
};

/// Where compiled kernels come from.
struct CompileOptions {
  bool cache = true;
};

struct CheckCommand { ModelOptions model; };
struct ExplainCommand {
  ModelOptions model;
  std::string experiment;  ///< Empty: all.
  CompileOptions compile;
};
struct RunCommand {
  ModelOptions model;
  std::string experiment;   ///< Empty: all, in file order.
  std::string out;          ///< Empty: MODEL-results in the current folder.
  unsigned jobs = 0;        ///< 0: as many as there are cores.
  std::optional<std::uint64_t> sample;
  std::optional<double> time_limit;  ///< [s]
  CompileOptions compile;
  bool timings = false;
};
struct TidyCommand {
  ModelOptions model;
  bool in_place = false;
};
struct EmitCommand {
  ModelOptions model;
  std::string experiment;
  std::string stage;
  std::string out;          ///< Empty: standard output.
};
/// Text for --help and --version.
struct HelpCommand { std::string text; };
/// What is wrong with the command line.
struct WrongCommandLine {
  std::string text, remedy;
};
using Command =
    std::variant<CheckCommand, ExplainCommand, RunCommand, TidyCommand, EmitCommand, HelpCommand, WrongCommandLine>;

/// Stages of `tarn emit`, in the order of the flow.
const std::vector<std::string>& emit_stages();

/// True if the command line asks for `--diagnostics json`, whatever else is wrong with it.
bool asks_for_json(int argc, const char* const* argv);

Command parse_command_line(int argc, const char* const* argv);

}  // namespace tarn::compiler
