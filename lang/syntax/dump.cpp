#include "lang/syntax/dump.h"

#include <array>
#include <type_traits>

namespace tarn {
namespace {

class Dumper {
 public:
  explicit Dumper(const Ast& ast) : ast_(ast) {}
  std::string take() { return std::move(out_); }

  void operator()(const ast::UseItem& item) {
    line("use " + (item.file ? dump(*item.file) + " as " : "") + item.name.text);
    doc(item.doc);
  }
  void operator()(const ast::Parameter& item) { arg("parameter", item.arg); }
  void operator()(const ast::Let& let) {
    line("let " + let.name.text + " " + text(let.value));
    doc(let.doc);
  }
  void operator()(const ast::Law& law) {
    constexpr std::array<std::string_view, 4> kWords{"schedule", "spectrum", "psd", "function"};
    line(std::string(kWords[static_cast<std::size_t>(law.kind)]) + " " + law.name.text);
    const Indent indent(*this);
    doc_line(law.doc);
    for (const ast::Arg& a : law.args) arg("arg", a);
    if (law.result) line("type " + type(*law.result));
    line("value " + text(law.value));
  }
  void operator()(const ast::Bath& bath) { block("bath", bath); }
  void operator()(const ast::Kind& kind) {
    block(kind.element == ast::ElementKind::qubit ? "qubit" : "coupler", kind);
  }
  void operator()(const ast::Chip& chip) { block("chip", chip); }
  void operator()(const ast::Experiment& experiment) {
    line("experiment " + experiment.name.text);
    const Indent indent(*this);
    doc_line(experiment.doc);
    for (const ast::Statement& statement : experiment.statements) std::visit(*this, statement);
  }

  void operator()(const ast::BathValue& value) {
    constexpr std::array<std::string_view, 5> kWords{"density", "psd", "temperature", "width", "shift"};
    line(std::string(kWords[static_cast<std::size_t>(value.setting)]) + " " + text(value.value));
  }
  void operator()(const ast::BathBand& band) { line("band " + text(band.band)); }
  void operator()(const ast::EnergyTerm& term) {
    line("energy " + text(term.value));
    loops(term.loops);
  }
  void operator()(const ast::JumpTerm& term) {
    line("jump " + text(term.value));
    loops(term.loops);
  }
  void operator()(const ast::NoiseTerm& term) {
    line(std::string(term.shared ? "noise shared" : "noise") + " ~ " + text(term.bath));
    const Indent indent(*this);
    for (const ast::ExprId op : term.operators) line("operator " + text(op));
    for (const ast::Loop& loop : term.loops) (*this)(loop);
    if (term.correlation) {
      line("correlation " + term.correlation->first.text + " " + term.correlation->second.text + " " +
           text(term.correlation->value));
    }
  }
  void operator()(const ast::Loop& loop) {
    std::string out = "for";
    for (const ast::Name& name : loop.names) out += " " + name.text;
    out += " in " + text(loop.first);
    if (loop.last) out += " .. " + text(*loop.last);
    if (loop.where) out += " where " + text(*loop.where);
    line(out);
  }
  void operator()(const ast::QubitPlace& place) {
    line("qubit " + text(place.place) + " : " + text(place.kind) + optional(" offset ", place.offset));
    loops(place.loops);
  }
  void operator()(const ast::ChipPlace& place) {
    line("chip " + text(place.place) + " : " + text(place.chip));
    loops(place.loops);
  }
  void operator()(const ast::CouplerPlace& place) {
    line("coupler " + text(place.left) + " -- " + text(place.right) + " : " + text(place.kind));
    loops(place.loops);
  }

  void operator()(const ast::ChipUse& use) { line("chip " + text(use.chip)); }
  void operator()(const ast::Begin& begin) { line("begin " + text(begin.state)); }
  void operator()(const ast::Pace& pace) {
    line("pace");
    const Indent indent(*this);
    for (const ast::Piece& piece : pace.pieces) std::visit(*this, piece.piece);
  }
  void operator()(const ast::StartPiece& piece) { line("start " + text(piece.s)); }
  void operator()(const ast::RampPiece& piece) { line("ramp " + text(piece.s) + " over " + text(piece.duration)); }
  void operator()(const ast::HoldPiece& piece) { line("hold " + text(piece.duration)); }
  void operator()(const ast::StepPiece& piece) { line("step " + text(piece.s)); }
  void operator()(const ast::FollowPiece& piece) { line("follow " + text(piece.waveform)); }
  void operator()(const ast::Equation& equation) {
    line(equation.each ? "equation each" : "equation");
    const Indent indent(*this);
    for (const ast::EquationChoice& choice : equation.choices) {
      line((choice.label ? choice.label->text + " = " : "") + text(choice.equation));
    }
  }
  void operator()(const ast::Levels& levels) { line(levels.count ? "levels " + text(*levels.count) : "levels auto"); }
  void operator()(const ast::Draws& draws) {
    constexpr std::array<std::string_view, 3> kWords{"trajectories", "ensemble", "freeze"};
    line(std::string(kWords[static_cast<std::size_t>(draws.kind)]) + " " + text(draws.count) + optional(" seed ", draws.seed));
  }
  void operator()(const ast::Observe& observe) {
    line("observe " + observe.name.text + optional(" = ", observe.value) +
         (observe.unit ? " in [" + observe.unit->text + "]" : "") + std::visit(When{*this}, observe.when));
    doc(observe.doc);
  }
  void operator()(const ast::Scan& scan) { line("scan " + scan.variable.text + " over " + text(scan.values)); }
  void operator()(const ast::Sweep& sweep) {
    line(sweep.together ? "sweep together" : "sweep");
    const Indent indent(*this);
    for (const ast::SweepAxis& axis : sweep.axes) line(text(axis.parameter) + " over " + text(axis.values));
  }
  void operator()(const ast::Data& data) { line("data " + data.name.text + " = " + text(data.table)); }
  void operator()(const ast::Compare& compare) { line("compare " + compare.observable.text + " with " + compare.data.text); }
  void operator()(const ast::Fit& fit) {
    std::string out = "fit";
    for (const ast::Path& parameter : fit.parameters) out += " " + text(parameter);
    line(out + " to " + fit.data.text + (fit.each ? " each " + text(*fit.each) : ""));
  }
  void operator()(const ast::Expect& expect) { line("expect " + text(expect.claim) + optional(" where ", expect.where)); }
  void operator()(const ast::Tolerance& tolerance) { line("tolerance " + text(tolerance.value)); }

 private:
  struct Indent {
    explicit Indent(Dumper& d) : dumper(d) { ++dumper.depth_; }
    Indent(const Indent&) = delete;
    Indent& operator=(const Indent&) = delete;
    ~Indent() { --dumper.depth_; }
    Dumper& dumper;
  };
  struct When {
    const Dumper& dumper;
    std::string operator()(std::monostate) const { return ""; }
    std::string operator()(const ast::AtEnd&) const { return " at end"; }
    std::string operator()(const ast::AtPoint& point) const {
      constexpr std::array<std::string_view, 3> kMeetings{"", " first", " last"};
      return " at " + point.variable.text + " = " + dumper.text(point.value) +
             std::string(kMeetings[static_cast<std::size_t>(point.meeting)]);
    }
    std::string operator()(const ast::Along& along) const { return " along " + dumper.text(along.count); }
  };

  std::string text(ast::ExprId id) const { return dump(ast_, id); }
  std::string text(const ast::Path& path) const { return dump(ast_, path); }
  std::string text(const ast::Range& range) const { return text(range.low) + " .. " + text(range.high); }
  std::string optional(std::string_view word, const std::optional<ast::ExprId>& id) const {
    return id ? std::string(word) + text(*id) : "";
  }

  void line(const std::string& words) { out_ += std::string(2 * depth_, ' ') + words + "\n"; }
  void doc_line(const std::string& words) {
    if (words.empty()) return;
    std::string escaped;
    for (const char c : words) escaped += c == '\n' ? std::string("\\n") : std::string(1, c);
    line("doc " + escaped);
  }
  void doc(const std::string& words) {
    const Indent indent(*this);
    doc_line(words);
  }
  void loops(const std::vector<ast::Loop>& list) {
    const Indent indent(*this);
    for (const ast::Loop& loop : list) (*this)(loop);
  }
  static std::string type(const ast::TypeText& type) {
    constexpr std::array<std::string_view, 4> kParts{"qubit", "coupler", "schedule", "bath"};
    if (const auto* name = std::get_if<ast::Name>(&type.type)) return name->text;
    if (const auto* unit = std::get_if<ast::UnitText>(&type.type)) return "[" + unit->text + "]";
    return std::string(kParts[static_cast<std::size_t>(std::get<ast::PartType>(type.type))]);
  }
  void arg(std::string_view word, const ast::Arg& a) {
    line(std::string(word) + " " + a.name.text);
    const Indent indent(*this);
    doc_line(a.doc);
    if (a.type) line("type " + type(*a.type));
    if (a.value) line("default " + text(*a.value));
    if (a.range) line("range " + text(*a.range));
    if (a.spread) line((a.spread->op == ast::SpreadOp::add ? "spread + " : "spread * ") + text(a.spread->distribution));
  }
  template <class Block>
  void block(std::string_view word, const Block& block) {
    line(std::string(word) + " " + block.name.text);
    const Indent indent(*this);
    doc_line(block.doc);
    for (const ast::Arg& a : block.args) arg("arg", a);
    for (const auto& entry : block.entries) std::visit(*this, entry);
  }

  const Ast& ast_;
  std::string out_;
  std::size_t depth_ = 0;
};

}  // namespace

std::string dump(const Ast& ast) {
  Dumper dumper(ast);
  for (const ast::Item& item : ast.items) std::visit(dumper, item);
  return dumper.take();
}

}  // namespace tarn
