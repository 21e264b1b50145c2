#pragma once
/// \file The abstract syntax tree of one `.tarn` file: every construct of the grammar,
/// names not yet resolved. Expressions live in one arena and refer to each other by id.

#include <cstdint>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "lang/quantities/units.h"
#include "lang/source/span.h"
#include "lang/support/id.h"

namespace tarn::ast {

using ExprId = Id<struct ExprTag>;

/// A word where it stands. The micro sign is kept as the Greek letter mu.
struct Name {
  Span span;
  std::string text;
};

/// `GHz` after a number, or `[1/us]`.
struct UnitText {
  Span span;         ///< With the brackets.
  std::string text;  ///< Without the brackets.
  bool bracket = false;
  Unit unit;
};

// ---- Expressions -----------------------------------------------------------------

/// Where the parser found an error inside an expression; later phases stay silent on it.
struct ErrorExpr {};

/// `5`, `5 GHz`, `0.2 [1/us]`. `value` is as written, before the unit's factor.
struct Number {
  double value = 0;
  std::string text;
  std::optional<UnitText> unit;
};

/// `"A{i} [GHz]"`: literal[0] insert[0] literal[1] ... ; one literal more than inserts.
struct Text {
  Span span;
  std::vector<std::string> literals;
  std::vector<Name> inserts;
};

/// `name[index]` of a path.
struct Step {
  Name name;
  std::optional<ExprId> index;
};

/// An argument of a call: `value` or `name = value`. The name may be a reserved word.
struct Given {
  Span span;
  std::optional<Name> name;
  ExprId value;
};

/// `cell[k].q[i]`, `spectra.ohmic(strength = eta)`.
struct Path {
  Span span;
  std::vector<Step> steps;  ///< At least one.
  bool call = false;        ///< Written with parentheses, even if empty.
  std::vector<Given> given;
};

/// `|01><10|`, `|1><1|(q)`.
struct Ketbra {
  std::string ket;  ///< Characters 0 and 1, as many as in bra.
  std::string bra;
  std::vector<Path> places;  ///< Empty if not applied to places.
};

/// `when p is "1"`.
struct Held {
  Span span;
  Path place;
  Text state;
};

/// A path used as a value, with what restricts it.
struct Use {
  Path path;
  std::vector<Held> held;
  std::optional<Name> under;  ///< Label of an equation.
};

enum class UnaryOp : std::uint8_t { negate, logical_not };
struct Unary {
  UnaryOp op;
  ExprId operand;
};

enum class BinaryOp : std::uint8_t {
  add, subtract, multiply, divide, power,
  less_equal, greater_equal, equal, not_equal, less, greater,
  logical_and, logical_or,
};
struct Binary {
  BinaryOp op;
  ExprId left, right;
};

struct Choice {  // if condition then yes else no
  ExprId condition, yes, no;
};

using ExprNode = std::variant<ErrorExpr, Number, Text, Ketbra, Use, Unary, Binary, Choice>;

struct Expr {
  Span span;  ///< With parentheses, where there are any.
  bool parenthesised = false;
  ExprNode node;
};

struct Range {  // low .. high
  Span span;
  ExprId low, high;
};

// ---- Declarations ----------------------------------------------------------------

enum class PartType : std::uint8_t { qubit, coupler, schedule, bath };

/// After a colon: a word (`number`, `count`, `frequency`, ...), a unit, or a kind of part.
struct TypeText {
  Span span;
  std::variant<Name, UnitText, PartType> type;
};

enum class SpreadOp : std::uint8_t { add, multiply };
struct Spread {  // spread + normal(5 MHz)
  Span span;
  SpreadOp op = SpreadOp::add;
  Path distribution;
};

struct Arg {
  Span span;
  Name name;
  std::optional<TypeText> type;
  std::optional<ExprId> value;  ///< The default.
  std::optional<Range> range;
  std::optional<Spread> spread;
  std::string doc;  ///< Text of its `##` comments, lines joined by a newline.
};

struct UseItem {  // use spectra; use "five.tarn" as five
  Span span;
  Name name;                ///< The name the module goes by in this file.
  std::optional<Text> file;  ///< Nothing for the library's.
  std::string doc;
};

struct Parameter {
  Span span;
  Arg arg;
};

struct Let {
  Span span;
  Name name;
  ExprId value;
  std::string doc;
};

enum class LawKind : std::uint8_t { schedule, spectrum, psd, function };
struct Law {
  Span span;
  LawKind kind = LawKind::function;
  Name name;
  std::vector<Arg> args;
  std::optional<TypeText> result;
  ExprId value;
  std::string doc;
};

enum class BathSetting : std::uint8_t { density, psd, temperature, width, shift };
struct BathValue {
  Span span;
  Span word;  ///< The setting's word.
  BathSetting setting = BathSetting::density;
  ExprId value;
};
struct BathBand {
  Span span;
  Range band;
};
using BathEntry = std::variant<Let, BathValue, BathBand>;
struct Bath {
  Span span;
  Name name;
  std::vector<Arg> args;
  std::vector<BathEntry> entries;
  std::string doc;
};

/// `for a, b in first .. last where condition`; without `last`, over rows or a list.
struct Loop {
  Span span;
  std::vector<Name> names;
  ExprId first;
  std::optional<ExprId> last;
  std::optional<ExprId> where;
};

struct EnergyTerm {
  Span span;
  ExprId value;
  std::vector<Loop> loops;
};
struct JumpTerm {
  Span span;
  ExprId value;
  std::vector<Loop> loops;
};
struct Correlation {  // correlation(i, j) = value
  Span span;
  Name first, second;
  ExprId value;
};
struct NoiseTerm {
  Span span;
  bool shared = false;
  std::vector<ExprId> operators;  ///< At least one.
  Path bath;
  std::vector<Loop> loops;
  std::optional<Correlation> correlation;
};

enum class ElementKind : std::uint8_t { qubit, coupler };
using KindEntry = std::variant<Let, EnergyTerm, JumpTerm, NoiseTerm>;
struct Kind {  // qubit site(...) { ... }
  Span span;
  ElementKind element = ElementKind::qubit;
  Name name;
  std::vector<Arg> args;
  std::vector<KindEntry> entries;
  std::string doc;
};

struct QubitPlace {  // qubit q[i] : site(...) offset x for ...
  Span span;
  Path place, kind;
  std::optional<ExprId> offset;
  std::vector<Loop> loops;
};
struct ChipPlace {  // chip cell[k] : five for ...
  Span span;
  Path place, chip;
  std::vector<Loop> loops;
};
struct CouplerPlace {  // coupler a -- b : link(...) for ...
  Span span;
  Path left, right, kind;
  std::vector<Loop> loops;
};
using ChipEntry = std::variant<Let, QubitPlace, ChipPlace, CouplerPlace, EnergyTerm, JumpTerm, NoiseTerm>;
struct Chip {
  Span span;
  Name name;
  std::vector<Arg> args;
  std::vector<ChipEntry> entries;
  std::string doc;
};

// ---- Statements of an experiment -------------------------------------------------

struct ChipUse {
  Span span;
  Path chip;
};
struct Begin {
  Span span;
  ExprId state;
};

struct StartPiece { ExprId s; };            // start S
struct RampPiece { ExprId s, duration; };   // ramp to S over T
struct HoldPiece { ExprId duration; };      // hold for T
struct StepPiece { ExprId s; };             // step to S
struct FollowPiece { Path waveform; };      // follow table(...)
struct Piece {
  Span span;
  std::variant<StartPiece, RampPiece, HoldPiece, StepPiece, FollowPiece> piece;
};
struct Pace {
  Span span;
  std::vector<Piece> pieces;
};

struct EquationChoice {
  Span span;
  std::optional<Name> label;
  Path equation;
};
struct Equation {
  Span span;
  bool each = false;                    ///< Written `each of (...)`.
  std::vector<EquationChoice> choices;  ///< One unless `each`.
};

struct Levels {
  Span span;
  std::optional<ExprId> count;  ///< Nothing: `auto`.
};

enum class DrawKind : std::uint8_t { trajectories, ensemble, freeze };
struct Draws {
  Span span;
  DrawKind kind = DrawKind::trajectories;
  ExprId count;
  std::optional<ExprId> seed;
};

enum class Meeting : std::uint8_t { unsaid, first, last };
struct AtEnd {};
struct AtPoint {  // at s = 0.5 first
  Name variable;  ///< `t` or `s`, not yet checked.
  ExprId value;
  Meeting meeting = Meeting::unsaid;
};
struct Along { ExprId count; };
struct Observe {
  Span span;
  Name name;
  std::optional<ExprId> value;  ///< Nothing: the observable of that name itself.
  std::optional<UnitText> unit;
  std::variant<std::monostate, AtEnd, AtPoint, Along> when;
  std::string doc;
};

struct Scan {
  Span span;
  Name variable;
  ExprId values;
};
struct SweepAxis {
  Span span;
  Path parameter;
  ExprId values;
};
struct Sweep {
  Span span;
  bool together = false;
  std::vector<SweepAxis> axes;  ///< At least one.
};
struct Data {
  Span span;
  Name name;
  Path table;
};
struct Compare {
  Span span;
  Name observable, data;
};
struct Fit {
  Span span;
  std::vector<Path> parameters;  ///< At least one.
  Name data;
  std::optional<Path> each;
};
struct Expect {
  Span span;
  ExprId claim;
  std::optional<ExprId> where;
};
struct Tolerance {
  Span span;
  ExprId value;
};

using Statement = std::variant<Let, ChipUse, Begin, Pace, Equation, Levels, Draws, Observe, Scan, Sweep, Data,
                               Compare, Fit, Expect, Tolerance>;
struct Experiment {
  Span span;
  Name name;
  std::vector<Statement> statements;
  std::string doc;
};

using Item = std::variant<UseItem, Parameter, Let, Law, Bath, Kind, Chip, Experiment>;

/// `#` or `##` to the end of its line, in the order of the text; not part of the tree.
struct Comment {
  Span span;
  bool doc = false;
};

}  // namespace tarn::ast

namespace tarn {

/// One file. Statements that did not parse are missing and were reported.
struct Ast {
  FileId file;
  std::vector<ast::Item> items;
  std::vector<ast::Expr> exprs;  ///< Operands precede their uses.
  std::vector<ast::Comment> comments;

  const ast::Expr& expr(ast::ExprId id) const { return exprs[id.row]; }
};

}  // namespace tarn
