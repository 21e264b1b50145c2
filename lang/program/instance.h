#pragma once
/// \file One experiment with its counts fixed: the chip unrolled into operators, everything that
/// the run needs as nodes of one graph.

#include <complex>
#include <cstdint>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "lang/program/equation.h"
#include "lang/program/graph.h"
#include "lang/quantities/units.h"

namespace tarn {

/// X and Z bits of a Pauli word: i^popcount(x & z) X^x Z^z. Qubit q of n is bit n-1-q.
struct Word {
  std::uint64_t x = 0, z = 0;
  bool operator==(const Word&) const = default;
  auto operator<=>(const Word&) const = default;
};

/// factor * coefficient * word.
struct OperatorTerm {
  std::complex<double> factor;
  NodeId coefficient;
  Word word;
};
/// A sum; no two terms share both coefficient and word.
using Operator = std::vector<OperatorTerm>;

/// A physical quantity to be shown: the unit the user chose or the default of its dimension.
struct Shown {
  std::string label;   ///< GHz; empty for plain numbers.
  double factor = 1;   ///< Shown value = internal value / factor.
};

struct ParameterUse {
  std::string name;
  Dimension dimension;
  Shown unit;
  double value = 0;
  std::optional<double> lowest, highest;
  Span span;
};

struct InstanceQubit {
  std::string path;
  std::string kind;
  std::optional<NodeId> offset;
  Span span;
};

struct EnergyTerm {
  Operator op;
  std::string where;  ///< The place it belongs to: q[0], q[0] -- q[1], or the chip.
  std::string text;   ///< As written in the kind.
  Span span;
};

struct InstanceBath {
  std::string name;
  NodeId density;      ///< J(w), a frequency, of w and parameters.
  NodeId temperature;
  Span span;
};

struct NoiseTerm {
  Operator op;
  std::uint32_t bath = 0;
  std::string what;    ///< Z(q[0]) ~ cold
  Span span;
};

/// Noise terms first .. first + count - 1 have copies of one bath that are not independent.
struct CorrelationI {
  std::uint32_t first = 0, count = 0;
  std::vector<NodeId> elements;      ///< count^2 numbers of parameters, row after row.
  std::vector<std::string> indices;  ///< The index of each copy, as shown: i = 2.
  Span span;                         ///< Of the expression.
};

struct JumpTerm {
  Operator op;
  std::string what;
  Span span;
};

// ---- experiment ----

struct BeginGroundI {};
struct BeginThermalI { std::optional<NodeId> temperature; };
struct BeginPlusI {};
struct BeginStateI { std::string letters; };
struct BeginPopulationsI { std::vector<NodeId> weights; };
struct BeginSteadyI {};
using BeginI = std::variant<BeginGroundI, BeginThermalI, BeginPlusI, BeginStateI, BeginPopulationsI, BeginSteadyI>;

struct PaceStartI { NodeId s; };
struct PaceRampI { NodeId to, over; };
struct PaceHoldI { NodeId time; };
struct PaceStepI { NodeId to; };
struct PaceFollowI { std::vector<double> t, s; Span span; };
using PacePieceI = std::variant<PaceStartI, PaceRampI, PaceHoldI, PaceStepI, PaceFollowI>;

/// An equation with its options. `none`: it has an error, which was reported.
struct EquationI {
  std::string label;                   ///< In `each of`; else empty.
  EquationKind kind = EquationKind::none;
  bool lamb_shift = true;
  MemoryI memory = MemoryI::markov;    ///< Of redfield.
  std::optional<NodeId> window;        ///< Of coarse_grained, a time; none: auto.
  std::optional<std::uint32_t> depth;  ///< Of hierarchy; none: raised until the answers stand.
  Span span;
};

struct TrajectoriesI {
  std::uint32_t count = 0;
  std::uint64_t seed = 0;
};

enum class SetKind : std::uint8_t { ground, level, state, any, target };
struct StateSetI {
  SetKind kind = SetKind::any;
  std::uint32_t level = 0;
  std::string letters;
  std::optional<NodeId> within;
};

struct PopulationI { StateSetI set; };
struct MeanI { Operator op; };
struct MeanEnergyI {};
struct LevelI { std::uint32_t level; };
struct GapI {};
struct PurityI {};
struct CoherenceI { std::uint32_t row, column; };
struct FidelityI { std::string letters; };
struct RelaxationI {};                           ///< T1
struct DephasingI { std::uint32_t row, column; };  ///< T2 of two levels
struct VerdictI {};
enum class ReductionI : std::uint8_t { lowest, highest, final };
struct ReduceI { ReductionI over; std::uint32_t observable; };
using ReadingI = std::variant<PopulationI, MeanI, MeanEnergyI, LevelI, GapI, PurityI, CoherenceI, FidelityI, ReduceI,
                              RelaxationI, DephasingI, VerdictI>;

struct AtEndI {};
struct AtTimeI { NodeId time; };
struct AtSI { NodeId s; bool last = false; };
struct AlongI { std::uint32_t samples; };
struct StaticI {};
using MomentI = std::variant<AtEndI, AtTimeI, AtSI, AlongI, StaticI>;

struct ObservableI {
  std::string name;
  Shown unit;
  MomentI moment;
  NodeId value;  ///< Of parameters, s, t, readings.
  Span span;
  bool shown = true;  ///< False: made for a claim only, listed in no table.
};

/// `observable under label`, as NodeOp::under numbers them.
struct UnderI {
  std::uint32_t equation, observable;
  bool operator==(const UnderI&) const = default;
};

/// A claim is a truth node over comparisons; lowering takes it apart.
struct ClaimI {
  std::string text;
  NodeId holds;                 ///< Of parameters, s, t and observables.
  std::optional<NodeId> where;
  Span span;
};

struct AxisColumnI {
  std::string parameter;
  std::optional<std::uint32_t> index;  ///< Row of `parameters`; none for a count.
  Shown unit;
  std::vector<double> values;
  Span span;  ///< The parameter's name in the sweep.
};
struct AxisI {
  std::vector<AxisColumnI> columns;
};

struct Instance {
  std::string experiment;
  Span span;
  std::string chip;
  Graph graph;
  std::vector<ParameterUse> parameters;  ///< Every parameter that the experiment or its sweeps use.
  std::vector<InstanceQubit> qubits;     ///< In the order placed: qubit 0 is the leftmost letter.
  std::vector<EnergyTerm> energy;
  std::vector<NoiseTerm> noise;          ///< One for each copy of a bath.
  std::vector<JumpTerm> jumps;
  std::vector<CorrelationI> correlations;
  std::vector<InstanceBath> baths;
  std::optional<BeginI> begin;
  std::vector<PacePieceI> pace;
  std::vector<EquationI> equations;      ///< One, or those of `each of`; empty without the statement.
  bool compares = false;                 ///< `each of`: the equations have labels.
  std::optional<std::uint32_t> levels;
  bool levels_auto = false;
  std::optional<TrajectoriesI> trajectories;
  std::vector<ReadingI> readings;
  std::vector<ObservableI> observables;
  bool distribution_at_end = false;
  std::vector<UnderI> under;
  std::vector<ClaimI> claims;
  std::vector<AxisI> axes;
  std::vector<std::uint64_t> points;     ///< Grid indices with these counts; first axis slowest.
  std::vector<double> scan;              ///< s values; empty without `scan`.
  double tolerance = 1e-6;
  std::vector<std::string> remarks;
  std::vector<std::string> counts;       ///< Names of the parameters that are counts and shaped it.
};

}  // namespace tarn
