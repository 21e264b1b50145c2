#pragma once
/// \file What to do with a kernel, as plain data: one experiment with its counts fixed.
///
/// Every number that depends on parameters is a function of the kernel, named by its row in one
/// of the function sets below. Units are for showing; inside, everything is in internal units.

#include <cstdint>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "lang/support/place.h"
#include "runtime/plan/operators.h"

namespace tarn::runtime {

/// Function sets of every kernel. Spectra follow: set kSpectra + b is J(w) of bath b.
enum SetIndex : std::uint32_t {
  kCoefficients = 0,  ///< Coefficients of all operators, of s and t (offsets included).
  kSettings = 1,      ///< Of parameters only: pace, temperatures, begin, widths.
  kObservables = 2,   ///< Of parameters, s, t and readings: the values of observables.
  kClaims = 3,        ///< Of parameters, s, t and observables: sides and truths of claims.
  kKinks = 4,         ///< Of s: see Kink.
  kSpectra = 5
};

/// Generators of every kernel; the Liouvillian is there if the equation is `lindblad`.
enum GeneratorIndex : std::uint32_t { kHamiltonian = 0, kSchroedinger = 1, kLiouvillian = 2 };

/// Shown value = internal value / factor; the label stands in brackets behind a name, none if empty.
struct DisplayUnit {
  std::string label;
  double factor = 1;
};

/// A row of set kSettings and where the user wrote it.
struct Setting {
  std::uint32_t row = 0;
  Place place;
};

/// An input of the kernel that the user may set.
struct Parameter {
  std::string name;
  std::uint32_t slot = 0;
  DisplayUnit unit;
  double value = 0;                       ///< Default, or what --set gave.
  std::optional<double> lowest, highest;  ///< The declared range, ends included.
  Place place;
};

// ---- the chip ----

struct QubitPlace {
  std::string path;                      ///< As shown: cell[0].q[2].
  std::optional<Setting> offset;         ///< Anneal offset: the qubit's s is s + offset, held in [0, 1].
};

/// J(w) of a bath by its form; rows of set kSettings. A sum of components is the density.
struct PowerLawForm { std::uint32_t strength, cutoff, exponent; };  ///< eta w (w/wc)^(p-1) exp(-w/wc)
struct DrudeForm { std::uint32_t strength, cutoff; };               ///< eta w / (1 + (w/wc)^2)
/// (2/pi) strength centre^2 width w / ((w^2 - centre^2)^2 + (width w)^2)
struct PeakForm { std::uint32_t strength, centre, width; };
/// scale * piecewise table in w [rad/ns]; loglog or linear between knots, zero outside.
struct TableForm { std::uint32_t scale; std::vector<double> w, j; bool loglog = false; };
struct GeneralForm {};                                              ///< Only the function set knows it.
using SpectralForm = std::variant<PowerLawForm, DrudeForm, PeakForm, TableForm, GeneralForm>;

struct Bath {
  std::string name;
  std::vector<SpectralForm> components;  ///< {GeneralForm} if not recognised.
  Setting temperature;
  Place place;
  std::vector<std::uint32_t> inputs;     ///< Input slots that J(w) reads, ascending.
};

/// A noise operator and the bath that drives it; each coupling has a copy of its bath of its own.
struct Coupling {
  OperatorSum op;
  std::uint32_t bath = 0;
  std::string what;  ///< As shown: Z(q[0]) ~ cold.
};

/// Couplings first .. first + count - 1 have copies of one bath that are not independent: entry (i, j), row after row,
/// is the correlation of copy i and copy j. Symmetric, 1 on the diagonal, no negative eigenvalue.
struct Correlation {
  std::uint32_t first = 0, count = 0;
  std::vector<std::uint32_t> elements;  ///< count^2 rows of set kSettings.
  Place place;
};

/// A Lindblad operator as written; factors may be complex.
struct Jump {
  OperatorSum op;
  std::string what;
};

/// s values where row `row` of kKinks equals one of `levels` are kinks of some schedule.
struct Kink {
  std::uint32_t row = 0;
  std::vector<double> levels;
};

struct Chip {
  std::string name;
  std::vector<QubitPlace> qubits;
  OperatorSum hamiltonian;  ///< Without terms in t.
  OperatorSum drive;        ///< Terms in t.
  std::vector<Bath> baths;
  std::vector<Coupling> couplings;
  std::vector<Correlation> correlations;
  std::vector<Jump> jumps;
  std::vector<Kink> kinks;
  /// Input slots that the Hamiltonian without its terms in t and the noise operators read: where
  /// they are equal, so are levels and couplings along s.
  std::vector<std::uint32_t> level_inputs;
  /// Input slot that is 1; set to 0 it turns all anneal offsets off (for `target`).
  std::uint32_t offsets_slot = 0;
};

// ---- the experiment ----

struct BeginGround {};
struct BeginThermal { std::optional<Setting> temperature; };
struct BeginPlus {};
struct BeginState { std::string letters; };  ///< One of 0 1 + - for each qubit.
struct BeginPopulations { std::vector<Setting> weights; };
struct BeginSteady {};  ///< The stationary state of the equation at the first s.
using Begin = std::variant<BeginGround, BeginThermal, BeginPlus, BeginState, BeginPopulations, BeginSteady>;

struct PaceStart { Setting s; };
struct PaceRamp { Setting to, over; };
struct PaceHold { Setting time; };
struct PaceStep { Setting to; };
struct PaceFollow { std::vector<double> t, s; Place place; };  ///< Linear between samples; t from 0.
using PacePiece = std::variant<PaceStart, PaceRamp, PaceHold, PaceStep, PaceFollow>;

enum class Equation : std::uint8_t { none, schroedinger, lindblad, davies, redfield, coarse_grained, universal, hierarchy };
/// As the language writes it.
constexpr const char* equation_word(Equation equation) {
  constexpr const char* kWords[] = {"none", "schroedinger", "lindblad", "davies", "redfield", "coarse_grained", "universal", "hierarchy"};
  return kWords[static_cast<int>(equation)];
}

/// Of redfield: coefficients in the limit of long times, integrated up to t, or driven with the anneal.
enum class Memory : std::uint8_t { markov, growing, driven };

/// An equation of motion with what it was given.
struct EquationChoice {
  std::string label;                   ///< As results and `under` name it; empty where there is one only.
  Equation equation = Equation::none;
  bool lamb_shift = true;
  Memory memory = Memory::markov;
  std::optional<Setting> window;       ///< coarse_grained [ns]; none: sqrt(tau_SB tau_B) of each bath.
  std::optional<std::uint32_t> depth;  ///< hierarchy; none: raised until the answers stand.
  Place place;
};

/// Quantum trajectories in place of a density matrix.
struct Trajectories {
  std::uint32_t count = 0;
  std::uint64_t seed = 0;
};

enum class StateSetKind : std::uint8_t { ground, level, state, any, target };
struct StateSet {
  StateSetKind kind = StateSetKind::any;
  std::uint32_t level = 0;
  std::string letters;
  std::optional<Setting> within;  ///< ground(within = ...): an angular rate.
};

// Readings: what is measured on a state or on the levels at some s. Reading r stands in input
// slot reading_slot + r when set kObservables is evaluated.
struct ReadPopulation { StateSet set; };
struct ReadMean { OperatorSum op; };
struct ReadMeanEnergy {};
struct ReadLevel { std::uint32_t level; };                ///< E(k)
struct ReadGap {};
struct ReadPurity {};
struct ReadCoherence { std::uint32_t row, column; };      ///< |rho| between two levels
struct ReadFidelity { std::string letters; };
struct ReadRelaxation {};                                 ///< T1 [ns], of the generator standing still
struct ReadDephasing { std::uint32_t row, column; };      ///< T2 of two levels [ns]
struct ReadVerdict {};                                    ///< 0 within, 1 marginal, 2 outside, the worst so far
enum class Over : std::uint8_t { lowest, highest, final };
/// lowest(x), highest(x), final(x) of an observable that has a trace or a scan.
struct ReadReduction { Over over; std::uint32_t observable; };
using Reading = std::variant<ReadPopulation, ReadMean, ReadMeanEnergy, ReadLevel, ReadGap, ReadPurity,
                             ReadCoherence, ReadFidelity, ReadReduction, ReadRelaxation, ReadDephasing, ReadVerdict>;

struct AtEnd {};
struct AtTime { Setting time; };
struct AtS { Setting s; bool last = false; };
struct Along { std::uint32_t samples; };  ///< Even in t, with both ends.
struct Static {};                         ///< No pace, a scan, or of parameters only.
using Moment = std::variant<AtEnd, AtTime, AtS, Along, Static>;

/// What the tolerance of an observable is relative to: plain numbers, absolute; energies, the larger
/// of the answer and the spectral width; rates, the larger of the answer and 1/(run length); others,
/// the answer.
enum class Scale : std::uint8_t { plain, energy, rate, answer };

struct Observable {
  std::string name;
  DisplayUnit unit;
  Moment moment;
  std::uint32_t row = 0;                ///< In set kObservables.
  std::vector<std::uint32_t> readings;  ///< What the row reads.
  bool reads_s = false;                 ///< The row depends on s apart from its readings.
  Scale scale = Scale::plain;
  Place place;
  bool shown = true;                    ///< False: made for a claim only and listed in no table.
};

enum class Relation : std::uint8_t { less, less_equal, greater, greater_equal, equal, not_equal };
enum class ClaimKind : std::uint8_t { all, any, no, compare, truth };
/// A claim as a tree over rows of kClaims, so that margins and error bars can be reported.
struct ClaimNode {
  ClaimKind kind = ClaimKind::truth;
  Relation relation = Relation::less;
  std::uint32_t lhs = 0, rhs = 0;       ///< compare: both sides; truth: lhs.
  std::vector<ClaimNode> children;      ///< all, any, no (one child).
};
struct Claim {
  std::string text;                         ///< As written.
  ClaimNode holds;
  std::optional<ClaimNode> where;
  std::vector<std::uint32_t> observables;   ///< What claim and condition read, under a named equation or not.
  std::vector<std::uint32_t> under;         ///< Rows of Plan::under that they read.
  bool under_all = false;                   ///< Each of them under a named equation: judged once a point.
  Place place;
};

/// One `sweep` statement: columns that move together. values[c][i] in internal units.
struct AxisColumn {
  std::string parameter;
  std::optional<std::uint32_t> slot;  ///< None: a count, fixed in this plan.
  DisplayUnit unit;
  std::vector<double> values;
};
struct Axis {
  std::vector<AxisColumn> columns;
  std::size_t size() const { return columns.empty() ? 0 : columns.front().values.size(); }
};

struct Scan {
  std::vector<double> s;
};

/// One experiment with its counts fixed. Where a swept count makes several plans, each has the
/// same axes and does the points listed in `points`.
struct Plan {
  std::string experiment;
  Chip chip;
  std::vector<Parameter> parameters;
  std::optional<Begin> begin;
  std::vector<PacePiece> pace;
  EquationChoice choice;                ///< The one that this plan runs.
  std::vector<EquationChoice> compared; ///< `each of`: all of them, `choice` being one; empty where there is one only.
  std::optional<std::uint32_t> levels;  ///< Lowest levels kept; none: all, or as `levels_auto` says.
  bool levels_auto = false;             ///< As many as population and tolerance ask for.
  std::optional<Trajectories> trajectories;
  std::vector<Reading> readings;
  std::uint32_t reading_slot = 0;
  std::vector<Observable> observables;
  std::uint32_t observable_slot = 0;    ///< Observable o stands in slot observable_slot + o for kClaims.
  /// `observable under label`: observable `observable` of compared[choice] stands in slot under_slot + i.
  struct Under { std::uint32_t choice, observable; };
  std::vector<Under> under;
  std::uint32_t under_slot = 0;
  bool distribution_at_end = false;
  std::vector<Claim> claims;
  std::vector<Axis> axes;               ///< First axis slowest.
  std::vector<std::uint64_t> points;    ///< Grid indices that belong to this plan, ascending.
  std::optional<Scan> scan;
  double tolerance = 1e-6;
  std::vector<std::string> left_out;    ///< What the equation leaves out, as shown with the answers.
  std::vector<std::string> remarks;     ///< Found before the run: tables that do not cover [0, 1], ...
};

}  // namespace tarn::runtime
