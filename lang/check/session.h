#pragma once
/// \file The state of one elaboration, and scopes: what names mean at a place in the text.

#include <cstdint>
#include <functional>
#include <map>
#include <optional>
#include <set>
#include <string>
#include <string_view>
#include <vector>

#include "lang/check/check.h"
#include "lang/check/value.h"
#include "lang/diagnostics/diagnostics.h"
#include "lang/program/program.h"

namespace tarn {

/// Bounds that end an elaboration with an error instead of a long run.
inline constexpr std::uint64_t kMaxSteps = 400'000;
inline constexpr std::size_t kMaxNodes = 200'000;
inline constexpr std::size_t kMaxPlacements = 20'000;
inline constexpr std::size_t kMaxOperatorTerms = 4096;
inline constexpr std::uint32_t kMaxQubits = 60;
inline constexpr std::uint32_t kMaxDepth = 400;

/// A name bound in a scope: a value, or a `let` that is evaluated when first asked for.
struct Binding {
  std::optional<Value> value;
  const ast::Let* let = nullptr;
  bool busy = false;
  Span span;
};

struct Readings;
struct ChipFrame;

/// What the words of the language mean here, besides names.
struct Site {
  std::string_view where = "here";  ///< For messages: in a schedule, in `noise`.
  std::optional<NodeId> s, t;
  std::optional<NodeId> table_argument;  ///< What `table(...)` is read at.
  bool table_holds = true;               ///< Outside its table the end value; else zero.
  std::optional<NodeId> spectrum_argument;  ///< Set where spectra are named without w.
  std::optional<std::vector<std::uint32_t>> own_qubits;  ///< In a kind: what its letters act on.
  const ChipFrame* chip = nullptr;       ///< Where operators name places.
  Readings* readings = nullptr;          ///< In an experiment: what is measured.
  bool operators = true;                 ///< False in schedules.
  bool formula = false;                  ///< In spectra and functions: a factor of 2 pi may be meant.
};

/// A scope. The outermost is the file's, which is `module` itself.
struct Scope {
  const Scope* outer = nullptr;
  std::uint32_t module = 0;
  const Site* site = nullptr;
  mutable std::map<std::string, Binding, std::less<>> names;
};

/// Where the evaluation came from, for the notes of a message.
struct Frame {
  Span span;
  std::string note;
};

/// One elaboration: checking a program, or unrolling one experiment.
struct Session {
  const Program& program;
  Graph& graph;
  Diagnostics& diagnostics;
  const Overrides& overrides;

  std::vector<ParameterUse> parameters{};          ///< In the order met.
  std::map<std::uint32_t, std::uint32_t> parameter_rows{};  ///< Row of Program::parameters -> of `parameters`.
  std::set<std::string> counts_used{};             ///< Parameters that are counts and were read.
  std::vector<std::string> opaque{};
  std::map<std::pair<std::uint32_t, std::string>, Binding> file_names{};
  struct TableRow {
    std::uint32_t row;
    Dimension dimension;
  };
  std::map<std::string, TableRow> tables{};        ///< Tables of the graph by what was read and how.
  std::vector<std::string> remarks{};
  std::set<std::pair<std::uint32_t, std::uint32_t>> turns{};  ///< Where a pi too many was reported: file and byte.
  std::vector<Frame> frames{};
  std::vector<const ast::Item*> active{};  ///< Laws being called, innermost last.
  std::uint64_t steps = 0;
  std::uint32_t depth = 0;
  bool generic = false;    ///< Arguments are opaque: places and values need not be known.
  bool trial = false;      ///< Checking only: a parameter may lack its value.
  bool constants_only = false;  ///< Parameters may not be read.
  bool exhausted = false;  ///< A bound was passed and reported.

  const Ast& ast(const Scope& scope) const { return program.ast(scope.module); }
  std::string_view text(Span span) const { return program.sources().text(span); }

  template <class... Args>
  ReportTail report(Span span, const DiagKind<Args...>& kind, const std::type_identity_t<Args>&... args) {
    ReportTail tail = diagnostics.report(span, kind, args...);
    for (auto frame = frames.rbegin(); frame != frames.rend(); ++frame) tail.note(frame->span, frame->note);
    return tail;
  }
  /// Counts one step; false once a bound is passed, which is reported at `span` the first time.
  bool step(Span span);
  /// Goes on counting from the work done by sessions before.
  void resume(std::uint64_t done);
  /// Something the run has to say beside its answers; kept once.
  void remark(const std::string& text);
};

/// Pushes a frame for as long as it lives.
class FrameGuard {
 public:
  FrameGuard(Session& session, Span span, std::string note) : session_(session) {
    session.frames.push_back({span, std::move(note)});
  }
  ~FrameGuard() { session_.frames.pop_back(); }
  FrameGuard(const FrameGuard&) = delete;
  FrameGuard& operator=(const FrameGuard&) = delete;

 private:
  Session& session_;
};

/// `text` of a span for a message: one line, cut after 40 characters.
std::string excerpt(const Session& session, Span span);

/// Binds a name in a scope; reports one that is predefined or already there.
void declare(Session& session, Scope& scope, const ast::Name& name, Value value);
void declare_let(Session& session, Scope& scope, const ast::Let& let);
bool check_declarable(Session& session, const ast::Name& name);

/// Value of a name declared in this scope, its outer scopes or the file; nothing if there is none.
std::optional<Value> look_up(Session& session, const Scope& scope, const ast::Name& name);
/// Value of a name declared in a file.
std::optional<Value> look_up_in_file(Session& session, std::uint32_t module, const ast::Name& name);
/// Module that a file calls by this name.
std::optional<std::uint32_t> find_module(const Session& session, std::uint32_t module, std::string_view name);

/// Value of a parameter: a node, or a known count.
Value parameter_value(Session& session, std::uint32_t row, Span span);

/// An opaque number: an argument of a law or part that is checked by itself.
NodeId opaque_number(Session& session, const std::string& name, Dimension dimension, Span span);

/// Reports an unknown name with the nearest known one.
void report_unknown_name(Session& session, const Scope& scope, const ast::Name& name);

/// Name of a declaration; empty for `use`.
const ast::Name* item_name(const ast::Item& item);

}  // namespace tarn
