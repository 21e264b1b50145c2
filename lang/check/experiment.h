#pragma once
/// \file Experiments with their counts fixed.

#include <algorithm>
#include <optional>
#include <vector>

#include "lang/check/chip.h"
#include "lang/check/readings.h"

namespace tarn {

/// The statements of an experiment by kind. A second one of those that stand once is reported.
struct Statements {
  const ast::ChipUse* chip = nullptr;
  const ast::Begin* begin = nullptr;
  const ast::Pace* pace = nullptr;
  const ast::Equation* equation = nullptr;
  const ast::Levels* levels = nullptr;
  const ast::Draws* trajectories = nullptr;
  const ast::Scan* scan = nullptr;
  const ast::Tolerance* tolerance = nullptr;
  std::vector<const ast::Let*> lets;
  std::vector<const ast::Observe*> observes;
  std::vector<const ast::Sweep*> sweeps;
  std::vector<const ast::Expect*> expects;
};
Statements sort_statements(Session& session, const ast::Experiment& experiment);

/// A swept parameter: its values in internal units.
struct SweptColumn {
  std::uint32_t parameter = 0;  ///< Row of Program::parameters.
  std::vector<double> values;
  Span span;
};
using SweptAxis = std::vector<SweptColumn>;

/// The axes of the grid, the first slowest; reports what is no parameter, not constant or out of range.
std::vector<SweptAxis> elaborate_sweeps(Session& session, const Scope& scope, const Statements& statements);

/// s values of `scan s over ...`.
std::vector<double> elaborate_scan(Session& session, const Scope& scope, const ast::Scan& scan);

// Each fills its part of the instance.
void elaborate_begin(Session& session, const Scope& scope, const ast::Begin& begin, Instance& instance);
void elaborate_pace(Session& session, const Scope& scope, const ast::Pace& pace, Instance& instance);
void elaborate_equation(Session& session, const Scope& scope, const ast::Equation& equation, Instance& instance);
void elaborate_levels(Session& session, const Scope& scope, const ast::Levels& levels, Instance& instance);
void elaborate_trajectories(Session& session, const Scope& scope, const ast::Draws& draws, Instance& instance);
void elaborate_observables(Session& session, Scope& scope, const Statements& statements, Readings& readings, Instance& instance);
void elaborate_claims(Session& session, Scope& scope, const Statements& statements, Readings& readings, Instance& instance);

/// What can only be judged of the whole: statements that are missing, `target`, the memory.
void check_whole(Session& session, const Statements& statements, const Readings& readings, Instance& instance);

/// What the equations of the experiment do not take: statements, too many qubits, jumps.
void check_equations(Session& session, const Statements& statements, const Readings& readings, const Instance& instance);

/// Refuses a bath that no equation with baths can take, J(w)/w without limit at w = 0, and correlations that no
/// noise has. Not judged where a swept parameter takes part. Precondition: the axes are in the instance.
void check_baths(Session& session, const Instance& instance);

/// True if some equation of the experiment has the property.
template <class Property>
bool any_equation(const Instance& instance, const Property& property) {
  return std::any_of(instance.equations.begin(), instance.equations.end(), [&](const EquationI& e) { return property(e.kind); });
}

/// Parameters that change an answer: rows of Instance::parameters.
std::vector<std::uint32_t> live_parameters(const Instance& instance);

Shown shown_unit(Dimension dimension);

}  // namespace tarn
