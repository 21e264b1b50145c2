#include "runtime/plan/text.h"

#include <fmt/format.h>

#include <iterator>

#include "lang/support/match.h"

namespace tarn::runtime {
namespace {

using Out = fmt::memory_buffer;

template <class... Args>
void line(Out& out, fmt::format_string<Args...> format, Args&&... args) {
  fmt::format_to(std::back_inserter(out), format, std::forward<Args>(args)...);
  out.push_back('\n');
}

std::string factor_text(std::complex<double> factor) {
  if (factor.imag() == 0) return fmt::format("{}", factor.real());
  return fmt::format("({} {} {}i)", factor.real(), factor.imag() < 0 ? '-' : '+', std::abs(factor.imag()));
}

void write_operator(Out& out, const OperatorSum& sum, std::size_t qubits) {
  for (const OperatorGroup& group : sum.groups) {
    fmt::format_to(std::back_inserter(out), "    coefficient {}:", group.coefficient);
    for (const WordTerm& term : group.terms) {
      fmt::format_to(std::back_inserter(out), " {} {}", factor_text(term.factor), letters(term.word, qubits));
    }
    out.push_back('\n');
  }
}

std::string text(const SpectralForm& form) {
  return std::visit(
      Match{[](const PowerLawForm& f) {
              return fmt::format("power law: strength {}, cutoff {}, exponent {}", f.strength, f.cutoff, f.exponent);
            },
            [](const DrudeForm& f) { return fmt::format("Drude: strength {}, cutoff {}", f.strength, f.cutoff); },
            [](const PeakForm& f) {
              return fmt::format("peak: strength {}, centre {}, width {}", f.strength, f.centre, f.width);
            },
            [](const TableForm& f) {
              return fmt::format("table: scale {}, {} points, {}", f.scale, f.w.size(), f.loglog ? "loglog" : "linear");
            },
            [](const GeneralForm&) { return std::string("general: by quadrature"); }},
      form);
}

void write_chip(Out& out, const Chip& chip) {
  line(out, "chip {}", chip.name);
  for (const QubitPlace& qubit : chip.qubits) {
    const std::string offset = qubit.offset ? fmt::format(" offset setting {}", qubit.offset->row) : "";
    line(out, "  qubit {}{}", qubit.path, offset);
  }
  line(out, "  hamiltonian");
  write_operator(out, chip.hamiltonian, chip.qubits.size());
  if (!chip.drive.groups.empty()) {
    line(out, "  drive");
    write_operator(out, chip.drive, chip.qubits.size());
  }
  for (std::size_t b = 0; b < chip.baths.size(); ++b) {
    const Bath& bath = chip.baths[b];
    line(out, "  bath {} {}: temperature setting {}", b, bath.name, bath.temperature.row);
    for (const SpectralForm& form : bath.components) line(out, "    {}", text(form));
  }
  for (const Coupling& coupling : chip.couplings) {
    line(out, "  noise {}: bath {}", coupling.what, coupling.bath);
    write_operator(out, coupling.op, chip.qubits.size());
  }
  for (const Correlation& c : chip.correlations) {
    line(out, "  correlation of noise {} .. {}: settings {}", c.first, c.first + c.count - 1, fmt::join(c.elements, " "));
  }
  for (const Jump& jump : chip.jumps) {
    line(out, "  jump {}", jump.what);
    write_operator(out, jump.op, chip.qubits.size());
  }
  for (const Kink& kink : chip.kinks) line(out, "  kinks where row {} meets {}", kink.row, fmt::join(kink.levels, " "));
}

std::string text(const Begin& begin) {
  return std::visit(
      Match{[](const BeginGround&) { return std::string("ground"); },
            [](const BeginThermal& b) {
              return b.temperature ? fmt::format("thermal, temperature setting {}", b.temperature->row)
                                   : std::string("thermal, temperature of the baths");
            },
            [](const BeginPlus&) { return std::string("plus"); },
            [](const BeginState& b) { return "state " + b.letters; },
            [](const BeginPopulations& b) { return fmt::format("populations of {} levels", b.weights.size()); },
            [](const BeginSteady&) { return std::string("steady"); }},
      begin);
}

std::string text(const PacePiece& piece) {
  return std::visit(
      Match{[](const PaceStart& p) { return fmt::format("start at setting {}", p.s.row); },
            [](const PaceRamp& p) { return fmt::format("ramp to setting {} over setting {}", p.to.row, p.over.row); },
            [](const PaceHold& p) { return fmt::format("hold for setting {}", p.time.row); },
            [](const PaceStep& p) { return fmt::format("step to setting {}", p.to.row); },
            [](const PaceFollow& p) { return fmt::format("follow {} samples", p.t.size()); }},
      piece);
}

std::string text(const StateSet& set) {
  switch (set.kind) {
    case StateSetKind::ground:
      return set.within ? fmt::format("ground within setting {}", set.within->row) : "ground";
    case StateSetKind::level:
      return fmt::format("level {}", set.level);
    case StateSetKind::state:
      return "state " + set.letters;
    case StateSetKind::any:
      return "any";
    case StateSetKind::target:
      return "target";
  }
  return {};
}

std::string text(const Reading& reading) {
  static constexpr const char* kOver[] = {"lowest", "highest", "final"};
  return std::visit(
      Match{[](const ReadPopulation& r) { return "population of " + text(r.set); },
            [](const ReadMean&) { return std::string("mean of an operator"); },
            [](const ReadMeanEnergy&) { return std::string("mean energy"); },
            [](const ReadLevel& r) { return fmt::format("level {}", r.level); },
            [](const ReadGap&) { return std::string("gap"); }, [](const ReadPurity&) { return std::string("purity"); },
            [](const ReadCoherence& r) { return fmt::format("coherence of levels {} and {}", r.row, r.column); },
            [](const ReadFidelity& r) { return "fidelity with " + r.letters; },
            [](const ReadReduction& r) {
              return fmt::format("{} of observable {}", kOver[static_cast<int>(r.over)], r.observable);
            },
            [](const ReadRelaxation&) { return std::string("T1"); },
            [](const ReadDephasing& r) { return fmt::format("T2 of levels {} and {}", r.row, r.column); },
            [](const ReadVerdict&) { return std::string("verdict"); }},
      reading);
}

std::string text(const Moment& moment) {
  return std::visit(
      Match{[](const AtEnd&) { return std::string("at end"); },
            [](const AtTime& m) { return fmt::format("at t = setting {}", m.time.row); },
            [](const AtS& m) { return fmt::format("at s = setting {} {}", m.s.row, m.last ? "last" : "first"); },
            [](const Along& m) { return fmt::format("along {}", m.samples); },
            [](const Static&) { return std::string("static"); }},
      moment);
}

std::string text(const ClaimNode& node) {
  static constexpr const char* kRelations[] = {"<", "<=", ">", ">=", "==", "!="};
  if (node.kind == ClaimKind::truth) return fmt::format("row {}", node.lhs);
  if (node.kind == ClaimKind::compare) {
    return fmt::format("row {} {} row {}", node.lhs, kRelations[static_cast<int>(node.relation)], node.rhs);
  }
  if (node.kind == ClaimKind::no) return "not (" + text(node.children.front()) + ")";
  const char* word = node.kind == ClaimKind::all ? "and" : "or";
  return fmt::format("({}) {} ({})", text(node.children[0]), word, text(node.children[1]));
}

std::string text(const EquationChoice& choice) {
  static constexpr const char* kMemories[] = {"markov", "growing", "driven"};
  std::string result = equation_word(choice.equation);
  if (!choice.label.empty()) result = choice.label + " = " + result;
  if (choice.equation == Equation::redfield) result += fmt::format(", memory {}", kMemories[static_cast<int>(choice.memory)]);
  if (choice.equation == Equation::coarse_grained) {
    result += choice.window ? fmt::format(", window setting {}", choice.window->row) : ", window auto";
  }
  if (choice.equation == Equation::hierarchy) {
    result += choice.depth ? fmt::format(", depth {}", *choice.depth) : ", depth raised until the answers stand";
  }
  return result + (choice.lamb_shift ? "" : ", shift off");
}

void write_equation(Out& out, const Plan& plan) {
  line(out, "equation {}", text(plan.choice));
  for (const EquationChoice& choice : plan.compared) line(out, "  one of {}", text(choice));
  if (plan.levels) line(out, "levels {}", *plan.levels);
  if (plan.levels_auto) line(out, "levels auto");
  if (plan.trajectories) line(out, "trajectories {} seed {}", plan.trajectories->count, plan.trajectories->seed);
}

void write_claims(Out& out, const Plan& plan) {
  for (std::size_t i = 0; i < plan.under.size(); ++i) {
    const Plan::Under& under = plan.under[i];
    line(out, "slot {}: observable {} under {}", plan.under_slot + i, under.observable, plan.compared[under.choice].label);
  }
  for (const Claim& claim : plan.claims) {
    line(out, "expect {}{}: {}{}", text(claim.holds), claim.where ? " where " + text(*claim.where) : "", claim.text,
         claim.under_all ? ", once a point" : "");
  }
}

void write_grid(Out& out, const Plan& plan) {
  for (const Axis& axis : plan.axes) {
    for (const AxisColumn& column : axis.columns) {
      line(out, "sweep {}: {} values, {}", column.parameter, column.values.size(),
           column.slot ? fmt::format("slot {}", *column.slot) : "a count");
    }
  }
  line(out, "points {}", plan.points.size());
  if (plan.scan) line(out, "scan s over {} values", plan.scan->s.size());
}

}  // namespace

std::string letters(const PauliWord& word, std::size_t qubits) {
  std::string result;
  for (std::size_t q = 0; q < qubits; ++q) {
    const std::size_t bit = qubits - 1 - q;
    const bool x = (word.x >> bit) & 1, z = (word.z >> bit) & 1;
    result += x ? (z ? 'Y' : 'X') : (z ? 'Z' : 'I');
  }
  return result;
}

std::string to_text(const Plan& plan) {
  Out out;
  line(out, "experiment {}", plan.experiment);
  for (const Parameter& p : plan.parameters) {
    line(out, "parameter {} in slot {}: {} {}", p.name, p.slot, p.value / p.unit.factor, p.unit.label);
  }
  write_chip(out, plan.chip);
  write_equation(out, plan);
  if (plan.begin) line(out, "begin {}", text(*plan.begin));
  for (const PacePiece& piece : plan.pace) line(out, "pace {}", text(piece));
  for (std::size_t r = 0; r < plan.readings.size(); ++r) {
    line(out, "reading {} in slot {}: {}", r, plan.reading_slot + r, text(plan.readings[r]));
    if (const auto* mean = std::get_if<ReadMean>(&plan.readings[r])) write_operator(out, mean->op, plan.chip.qubits.size());
  }
  for (const Observable& o : plan.observables) {
    line(out, "observe {} = row {} {}, reads {}{} [{}]", o.name, o.row, text(o.moment), fmt::join(o.readings, " "),
         o.reads_s ? " s" : "", o.unit.label.empty() ? "1" : o.unit.label);
  }
  if (plan.distribution_at_end) line(out, "observe distribution at end");
  write_grid(out, plan);
  write_claims(out, plan);
  line(out, "tolerance {}", plan.tolerance);
  for (const std::string& what : plan.left_out) line(out, "left out: {}", what);
  for (const std::string& remark : plan.remarks) line(out, "remark: {}", remark);
  return fmt::to_string(out);
}

}  // namespace tarn::runtime
