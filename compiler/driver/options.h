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
/// Text for --help and --version, or a complaint about the command line.
struct Exit {
  int status = 0;
  std::string text;
};
using Command = std::variant<CheckCommand, ExplainCommand, RunCommand, TidyCommand, EmitCommand, Exit>;

/// Stages of `tarn emit`, in the order of the flow.
const std::vector<std::string>& emit_stages();

Command parse_command_line(int argc, const char* const* argv);

}  // namespace tarn::compiler
