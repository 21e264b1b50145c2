#pragma once
/// \file From loaded files to a checked Program, and from it to the Instances of an experiment.

#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "lang/diagnostics/diagnostics.h"
#include "lang/program/program.h"

namespace tarn {

/// Values for parameters by name, in internal units.
using Overrides = std::map<std::string, double>;

/// Resolves and checks everything: each law, bath, kind and chip of every file by itself, with
/// its arguments opaque, then each experiment of the main file at its defaults. Ends within
/// bounds of work and memory that are reported as errors where a model passes them.
Program check(Modules modules, Diagnostics& diagnostics);

/// The experiment with this name; without a name the only one. Reports what does not fit, at the
/// option `--experiment`, whose text is added to the program's.
std::optional<std::uint32_t> find_experiment(const Program& program, const std::string& name, Diagnostics& diagnostics);

/// `--set p="5 GHz"`: each name with its text, read as an expression of constants. Reports
/// unknown names, wrong dimensions and values out of the declared range. The texts are added to
/// the program's, so that messages can show them.
Overrides read_overrides(Program& program, const std::vector<std::pair<std::string, std::string>>& settings,
                         Diagnostics& diagnostics);

/// One experiment with its counts fixed, for every combination of its swept counts, in grid
/// order; one Instance where no count is swept. Each lists in `points` the grid indices that are
/// its own. Empty after errors. Warnings and remarks that check() made are not made again.
/// Precondition: `program` was checked without errors.
std::vector<Instance> instances(const Program& program, std::uint32_t experiment, const Overrides& overrides,
                                Diagnostics& diagnostics);

/// The first Instance, for callers that show one.
std::optional<Instance> instantiate(const Program& program, std::uint32_t experiment, const Overrides& overrides,
                                    Diagnostics& diagnostics);

/// Reports overrides that change nothing in any of the instances about to run.
void check_overrides_used(const Program& program, const std::vector<Instance>& all, const Overrides& overrides,
                          Diagnostics& diagnostics);

}  // namespace tarn
