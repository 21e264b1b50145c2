#pragma once
/// \file What the user meant: names resolved, dimensions checked, values in internal units.

#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "lang/diagnostics/diagnostics.h"
#include "lang/program/instance.h"
#include "lang/source/loader.h"

namespace tarn {

/// What a file's names are: of `use`, and of its declarations.
struct ProgramModule {
  std::string name;  ///< How the main file calls it: empty for itself, `spectra`, `base.spectra`.
  std::map<std::string, std::uint32_t> uses;   ///< Name in this file -> row of Program::modules.
  std::map<std::string, std::uint32_t> items;  ///< Name of a declaration -> row of its items.
};

struct ProgramParameter {
  std::string name;      ///< As `--set` and `sweep` of the main file call it: ta, base.ta.
  std::string declared;  ///< Its name in its own file.
  std::uint32_t module = 0;
  Dimension dimension;
  bool count = false;
  bool broken = false;  ///< Its declaration has an error, which was reported.
  Shown unit;
  std::optional<double> value;  ///< Nothing: must be set or swept.
  std::optional<double> lowest, highest;
  Shown lowest_unit, highest_unit;  ///< As the range is written.
  Span span;
  std::string doc;
};

struct ProgramArgument {
  std::string name;
  std::string type;  ///< As written; `as its default`, `anything`.
};

/// A schedule, spectrum, psd or function; its arguments are opaque nodes of Program::graph.
struct ProgramLaw {
  std::string word;  ///< schedule, spectrum, psd, function.
  std::string name;
  std::vector<ProgramArgument> arguments;
  std::optional<NodeId> value;  ///< Nothing where it depends on an argument of any dimension.
};

/// A kind, bath or chip.
struct ProgramPart {
  std::string word;  ///< qubit, coupler, bath, chip.
  std::string name;
  std::vector<ProgramArgument> arguments;
  std::vector<std::string> lines;  ///< A kind's operators, term by term; else statements as written.
};

struct ProgramExperiment {
  std::string name;
  Span span;
  std::string doc;
  std::uint32_t item = 0;  ///< Row of the main file's items.
};

/// Row 0 of the modules is the main file. Copies share the texts and trees.
struct Program {
  std::shared_ptr<Modules> loaded;
  std::vector<ProgramModule> modules;
  std::vector<ProgramParameter> parameters;
  std::map<std::pair<std::uint32_t, std::string>, std::uint32_t> parameter_rows;  ///< By module and declared name.
  std::vector<ProgramLaw> laws;
  std::vector<ProgramPart> parts;
  std::vector<ProgramExperiment> experiments;  ///< Of the main file, in its order.
  std::map<std::string, Span> settings;        ///< `--set NAME=VALUE` as given, by name: for messages.
  Diagnostics told;                            ///< Warnings and remarks of checking it.
  Graph graph;                                 ///< Of the laws.
  std::vector<std::string> graph_parameters;   ///< Names of its parameter nodes.
  std::vector<std::string> opaque;             ///< Names of arguments: parameter node kOpaque + k.

  const Ast& ast(std::uint32_t module) const { return loaded->modules[module].ast; }
  const SourceSet& sources() const { return loaded->sources; }
};

/// Parameter nodes from here on stand for arguments of a law or part checked by itself.
inline constexpr std::uint32_t kOpaque = 1U << 24U;

}  // namespace tarn
