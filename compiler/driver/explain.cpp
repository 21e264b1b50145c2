#include "compiler/driver/explain.h"

#include <fmt/format.h>

#include <bit>
#include <iterator>

#include "compiler/driver/commands.h"
#include "compiler/driver/explain_levels.h"
#include "compiler/driver/messages.h"
#include "compiler/driver/model.h"
#include "lang/quantities/constants.h"
#include "runtime/experiment/functions.h"
#include "runtime/experiment/memory.h"
#include "runtime/experiment/plan_model.h"

namespace tarn::compiler {
namespace {

constexpr double kGigahertz = 1e9 * kHertz;
constexpr double kMillikelvin = 1e-3 * kKelvin;
constexpr std::size_t kLevelRows = 11;

using Out = fmt::memory_buffer;

template <class... Args>
void line(Out& out, fmt::format_string<Args...> format, Args&&... args) {
  fmt::format_to(std::back_inserter(out), format, std::forward<Args>(args)...);
  out.push_back('\n');
}

std::string shown(double value, const runtime::DisplayUnit& unit) {
  return fmt::format("{:.10g}{}{}", value / unit.factor, unit.label.empty() ? "" : " ", unit.label);
}

/// ZZ(q[0], q[1]): the letters that are not I, and the places they act on.
std::string acted_on(const runtime::PauliWord& word, const runtime::Chip& chip) {
  std::string letters, places;
  const std::size_t n = chip.qubits.size();
  for (std::size_t q = 0; q < n; ++q) {
    const bool x = (word.x >> (n - 1 - q)) & 1, z = (word.z >> (n - 1 - q)) & 1;
    if (!x && !z) continue;
    letters += x ? (z ? 'Y' : 'X') : 'Z';
    places += (places.empty() ? "" : ", ") + chip.qubits[q].path;
  }
  return letters.empty() ? "1" : fmt::format("{}({})", letters, places);
}

void write_head(Out& out, const Instance& instance, const Prepared& prepared) {
  line(out, "experiment {} on chip {}", instance.experiment, instance.chip);
  if (!prepared.plan.parameters.empty()) line(out, "\n  parameters");
  for (const runtime::Parameter& p : prepared.plan.parameters) {
    const std::string range = p.lowest && p.highest ? fmt::format("   in {} .. {}", shown(*p.lowest, p.unit), shown(*p.highest, p.unit)) : "";
    line(out, "    {:<16} {}{}", p.name, shown(p.value, p.unit), range);
  }
  line(out, "\n  qubits, in the order of bit strings");
  for (std::size_t q = 0; q < instance.qubits.size(); ++q) {
    const InstanceQubit& qubit = instance.qubits[q];
    line(out, "    {:>2}  {:<16} {}{}", q, qubit.path, qubit.kind, qubit.offset ? "   with an anneal offset" : "");
  }
}

/// What a coefficient follows along s, up to a factor; a number of its own has no shape.
std::string_view shape_of(const std::string& name) { return name.starts_with("value ") ? std::string_view{} : name; }

void write_terms(Out& out, const Prepared& prepared, const runtime::Functions& functions) {
  const runtime::Chip& chip = prepared.plan.chip;
  std::vector<std::vector<double>> at;
  for (const double s : {0.0, 0.5, 1.0}) at.push_back(functions.values(runtime::kCoefficients, s, 0));
  const auto& names = prepared.module.sets[runtime::kCoefficients].functions;
  const auto write = [&](const runtime::OperatorSum& sum) {
    for (const auto& group : sum.groups) {
      for (const auto& term : group.terms) {
        const double unit = term.factor.real() / kGigahertz;
        line(out, "    {:<22} {:>12.6g} {:>12.6g} {:>12.6g}   {}", acted_on(term.word, chip),
             unit * at[0][group.coefficient] + 0.0, unit * at[1][group.coefficient] + 0.0,
             unit * at[2][group.coefficient] + 0.0, shape_of(names[group.coefficient].name));
      }
    }
  };
  line(out, "\n  {:<24} {:>12} {:>12} {:>12}   varies as", "terms of H [GHz]", "s = 0", "s = 0.5", "s = 1");
  write(chip.hamiltonian);
  if (chip.drive.groups.empty()) return;
  line(out, "  terms in t [GHz], at t = 0");
  write(chip.drive);
}

std::string form_text(const runtime::SpectralForm& form, const std::vector<double>& settings) {
  const auto frequency = [&](std::uint32_t row) { return fmt::format("{:.6g} GHz", settings[row] / kGigahertz); };
  if (const auto* f = std::get_if<runtime::PowerLawForm>(&form)) {
    return fmt::format("power law w^{:.6g}, strength {:.6g}, cut-off {}", settings[f->exponent], settings[f->strength],
                       frequency(f->cutoff));
  }
  if (const auto* f = std::get_if<runtime::DrudeForm>(&form)) {
    return fmt::format("Drude, strength {:.6g}, cut-off {}", settings[f->strength], frequency(f->cutoff));
  }
  if (const auto* f = std::get_if<runtime::PeakForm>(&form)) {
    return fmt::format("peak at {}, width {}, reorganisation {}", frequency(f->centre), frequency(f->width),
                       frequency(f->strength));
  }
  if (const auto* f = std::get_if<runtime::TableForm>(&form)) {
    return fmt::format("table of {} points, {}", f->w.size(), f->loglog ? "log-log" : "linear");
  }
  return "no closed form known: by quadrature";
}

void write_noise(Out& out, const Prepared& prepared, const runtime::Functions& functions) {
  const runtime::Chip& chip = prepared.plan.chip;
  const std::vector<double> settings = functions.values(runtime::kSettings, 0, 0);
  if (!chip.baths.empty()) line(out, "\n  baths");
  for (const runtime::Bath& bath : chip.baths) {
    line(out, "    {:<16} {:.6g} mK", bath.name, settings[bath.temperature.row] / kMillikelvin);
    for (const auto& form : bath.components) line(out, "      J(w): {}", form_text(form, settings));
  }
  if (!chip.couplings.empty()) line(out, "\n  noise, each a bath of its own");
  for (const runtime::Coupling& coupling : chip.couplings) line(out, "    {}", coupling.what);
  if (!chip.jumps.empty()) line(out, "\n  jumps");
  for (const runtime::Jump& jump : chip.jumps) line(out, "    {}", jump.what);
}

std::string gap_text(const LevelRow& row) {
  return row.gap ? fmt::format("{:.6g}", *row.gap / kGigahertz) : "none";
}

void write_levels(Out& out, const Prepared& prepared) {
  const LevelSummary levels = levels_along(prepared, kLevelRows);
  if (!levels.failure.empty()) {
    line(out, "\n  levels: {}", levels.failure);
    return;
  }
  line(out, "\n  levels along s [GHz]");
  line(out, "    {:>6} {:>14} {:>12} {:>12}   ground", "s", "E(0)", "gap", "width");
  for (const LevelRow& row : levels.rows) {
    line(out, "    {:>6.3g} {:>14.8g} {:>12} {:>12.6g}   {}", row.s, row.ground / kGigahertz, gap_text(row),
         row.width / kGigahertz, row.degeneracy == 1 ? "one state" : fmt::format("{} states", row.degeneracy));
  }
  if (levels.smallest) line(out, "    smallest gap {} GHz at s = {:.4f}", gap_text(*levels.smallest), levels.smallest->s);
}

std::string structure_text(const ir::Generator& generator) {
  std::string text = generator.structure.real_words ? "real" : generator.structure.imaginary ? "-i times a real one" : "complex";
  return generator.structure.diagonal ? text + ", diagonal" : text;
}

void write_kernels(Out& out, const Prepared& prepared, const EngineReport& report) {
  line(out, "\n  compiled for {} points at a time; {}", prepared.kernel.lanes(),
       report.cache_hits > 0 ? "from the cache" : "compiled now");
  for (const ir::Generator& generator : prepared.module.generators) {
    std::size_t words = 0;
    for (const auto& group : generator.sum.groups) words += group.terms.size();
    const double mib = std::ldexp(16.0, static_cast<int>(generator.bits)) / 1048576;
    line(out, "    {:<14} {}, {} coefficient{}, {} words on 2^{} amplitudes: {:.3g} M word products, {:.3g} MiB a vector{}",
         generator.name, structure_text(generator), generator.sum.groups.size(),
         generator.sum.groups.size() == 1 ? "" : "s", words, generator.bits,
         std::ldexp(static_cast<double>(words), static_cast<int>(generator.bits)) * 1e-6, mib,
         generator.lanes ? "; lanes" : "");
  }
  std::size_t functions = 0;
  for (const ir::FunctionSet& set : prepared.module.sets) functions += set.functions.size();
  line(out, "    {} scalar functions over {} values, {} tables", functions, prepared.module.values.size(),
       prepared.module.tables.size());
}

/// What the equation takes: levels and their spacing, transitions, memory.
void write_cost(Out& out, const Prepared& prepared) {
  const runtime::Plan& plan = prepared.plan;
  constexpr double kMib = 1 << 20;
  const auto need = runtime::memory_needed(plan, runtime::lanes_used(plan, prepared.kernel));
  if (plan.choice.equation == runtime::Equation::davies) {
    const std::size_t all = std::size_t{1} << plan.chip.qubits.size();
    const std::size_t kept = std::min<std::size_t>(all, plan.levels.value_or(static_cast<std::uint32_t>(all)));
    line(out, "\n  davies: {} of {} levels, {} pairs of them, {} noise operator{}", kept, all, kept * (kept - 1) / 2,
         plan.chip.couplings.size(), plan.chip.couplings.size() == 1 ? "" : "s");
    const std::size_t rows = all <= 256 ? 101 : 3;
    if (const auto spacing = smallest_spacing(prepared, kept, rows)) {
      line(out, "    smallest spacing of neighbouring levels seen: {:.6g} GHz at s = {:.3g}", spacing->distance / kGigahertz,
           spacing->s);
    }
  }
  if (plan.choice.equation != runtime::Equation::none) {
    line(out, "  memory of a run: about {:.3g} MiB, and {:.3g} MiB more for each further job", (need.common + need.each_job) / kMib,
         need.each_job / kMib);
  }
}

}  // namespace

std::string explain(const Instance& instance, const Prepared& prepared, const EngineReport& report) {
  Out out;
  const runtime::Functions functions(prepared.kernel, prepared.tables, prepared.plan);
  write_head(out, instance, prepared);
  write_terms(out, prepared, functions);
  write_noise(out, prepared, functions);
  write_levels(out, prepared);
  write_kernels(out, prepared, report);
  write_cost(out, prepared);
  for (const std::string& what : prepared.plan.left_out) line(out, "  left out: {}", what);
  for (const std::string& remark : prepared.plan.remarks) line(out, "  remark: {}", remark);
  return fmt::to_string(out);
}

int explain_model(const ExplainCommand& command) {
  const auto model = load_model(command.model);
  if (!model) return kWrongInput;
  const auto chosen = choose_experiments(*model, command.model, command.experiment);
  if (!chosen) return kWrongInput;
  bool first = true;
  for (const ChosenExperiment& experiment : chosen->fitting) {
    EngineReport report;
    const auto prepared = prepare(experiment.instances.front(), model->program.sources(), {.cache = command.compile.cache}, report);
    if (!prepared) {
      show({"no_kernel", prepared.error().message}, command.model.json_diagnostics);
      return kIncomplete;
    }
    fmt::print("{}{}", first ? "" : "\n", explain(experiment.instances.front(), *prepared, report));
    first = false;
  }
  return chosen->complete ? kFine : kWrongInput;
}

}  // namespace tarn::compiler
