#include "compiler/lower/lower.h"

#include <algorithm>
#include <map>
#include <set>
#include <utility>

#include "compiler/lower/experiment.h"
#include "compiler/lower/generators.h"
#include "compiler/lower/kinks.h"
#include "compiler/lower/rows.h"
#include "compiler/lower/spectrum.h"

namespace tarn::compiler {
namespace {

using runtime::OperatorSum;

constexpr std::size_t kLongestName = 48;

/// A name a reader of dumps recognises: the user's own text where it is short.
std::string row_name(const Graph& graph, NodeId id, const SourceSet& sources) {
  const Span span = graph[id].span;
  if (span.end > span.begin) {
    const std::string text(sources.text(span));
    if (text.size() <= kLongestName && text.find('\n') == std::string::npos) return text;
  }
  return "value " + std::to_string(id.row);
}

std::vector<NodeId> coefficient_nodes(const Instance& instance) {
  std::vector<NodeId> nodes;
  const auto collect = [&](const Operator& op) {
    for (const OperatorTerm& term : op) nodes.push_back(term.coefficient);
  };
  for (const EnergyTerm& term : instance.energy) collect(term.op);
  for (const NoiseTerm& term : instance.noise) collect(term.op);
  for (const JumpTerm& term : instance.jumps) collect(term.op);
  return nodes;
}

Slots slots_of(const Instance& instance) {
  Slots slots;
  slots.offsets_on = static_cast<std::uint32_t>(instance.parameters.size());
  slots.readings = slots.offsets_on + 1;
  slots.observables = slots.readings + static_cast<std::uint32_t>(instance.readings.size());
  slots.under = slots.observables + static_cast<std::uint32_t>(instance.observables.size());
  return slots;
}

std::vector<std::string> input_names(const Instance& instance) {
  std::vector<std::string> names;
  for (const ParameterUse& parameter : instance.parameters) names.push_back(parameter.name);
  names.push_back("offsets on");
  for (std::size_t i = 0; i < instance.readings.size(); ++i) names.push_back("reading " + std::to_string(i));
  for (const ObservableI& observable : instance.observables) names.push_back(observable.name);
  for (const UnderI& under : instance.under) {
    names.push_back(instance.observables[under.observable].name + " under " + instance.equations[under.equation].label);
  }
  return names;
}

/// Rows of all function sets while one instance is lowered.
class Lowering {
 public:
  Lowering(const Instance& instance, const SourceSet& sources, ir::Module& module)
      : instance_(instance), sources_(sources), module_(module),
        values_(lower_nodes(instance.graph, slots_of(instance), module)) {
    for (const char* name : {"coefficients", "settings", "observables", "claims", "kinks"}) {
      rows_.emplace_back(module, static_cast<std::uint32_t>(module.sets.size()));
      module.sets.push_back({name, {}, false, {}});
    }
    module.sets[runtime::kCoefficients].differentiate = true;
  }

  std::uint32_t row(runtime::SetIndex set, NodeId node) {
    return rows_[set].row(values_[node.row], row_name(instance_.graph, node, sources_));
  }
  runtime::Setting setting(NodeId node) {
    return {row(runtime::kSettings, node), sources_.place(instance_.graph[node].span)};
  }
  OperatorSum sum(const Operator& op);
  Rows& coefficients() { return rows_[runtime::kCoefficients]; }
  ir::ValueId value(NodeId node) const { return values_[node.row]; }

 private:
  const Instance& instance_;
  const SourceSet& sources_;
  ir::Module& module_;
  std::vector<ir::ValueId> values_;
  std::vector<Rows> rows_;
};

OperatorSum Lowering::sum(const Operator& op) {
  std::map<std::uint32_t, std::map<runtime::PauliWord, std::complex<double>>> groups;
  for (const OperatorTerm& term : op) {
    groups[row(runtime::kCoefficients, term.coefficient)][{term.word.x, term.word.z}] += term.factor;
  }
  OperatorSum result;
  for (const auto& [coefficient, words] : groups) {
    runtime::OperatorGroup group{coefficient, {}};
    for (const auto& [word, factor] : words) {
      if (factor != std::complex<double>{}) group.terms.push_back({factor, word});
    }
    if (!group.terms.empty()) result.groups.push_back(std::move(group));
  }
  return result;
}

using RecognisedBaths = std::vector<std::optional<std::vector<RecognisedSpectrum>>>;

runtime::SpectralForm to_form(const RecognisedSpectrum& spectrum, const Instance& instance, Lowering& lowering) {
  const auto row = [&](NodeId node) { return lowering.row(runtime::kSettings, node); };
  if (const auto* law = std::get_if<RecognisedPowerLaw>(&spectrum)) {
    return runtime::PowerLawForm{row(law->strength), row(law->cutoff), row(law->exponent)};
  }
  if (const auto* drude = std::get_if<RecognisedDrude>(&spectrum)) {
    return runtime::DrudeForm{row(drude->strength), row(drude->cutoff)};
  }
  if (const auto* peak = std::get_if<RecognisedPeak>(&spectrum)) {
    return runtime::PeakForm{row(peak->strength), row(peak->centre), row(peak->width)};
  }
  const auto& table = std::get<RecognisedTable>(spectrum);
  const TableData& data = instance.graph.tables[table.table];
  return runtime::TableForm{row(table.scale), data.x, data.y, data.by == Interpolation::loglog};
}

/// Smooth interpolation has no closed form in the runtime: only linear and log-log tables do.
bool has_form(const RecognisedSpectrum& spectrum, const Instance& instance) {
  const auto* table = std::get_if<RecognisedTable>(&spectrum);
  if (table == nullptr) return true;
  const Interpolation by = instance.graph.tables[table->table].by;
  return by == Interpolation::linear || by == Interpolation::loglog;
}

RecognisedBaths recognise_baths(Instance& instance) {
  RecognisedBaths result;
  for (const InstanceBath& bath : instance.baths) {
    auto spectrum = recognise_spectrum(instance.graph, bath.density);
    if (spectrum) {
      for (const auto& summand : *spectrum) {
        if (!has_form(summand, instance)) { spectrum.reset(); break; }
      }
    }
    result.push_back(std::move(spectrum));
  }
  return result;
}

runtime::Bath lower_bath(const InstanceBath& bath, const std::optional<std::vector<RecognisedSpectrum>>& spectrum,
                         const Instance& instance, Lowering& lowering, const SourceSet& sources) {
  runtime::Bath result{bath.name, {}, lowering.setting(bath.temperature), sources.place(bath.span),
                       dependence(instance.graph, bath.density).parameters};
  if (!spectrum) {
    result.components.push_back(runtime::GeneralForm{});
    return result;
  }
  for (const auto& summand : *spectrum) result.components.push_back(to_form(summand, instance, lowering));
  return result;
}

/// Parameter i stands in slot i.
std::vector<std::uint32_t> level_inputs(const Instance& instance, const Operator& hamiltonian) {
  std::set<std::uint32_t> slots;
  const auto collect = [&](const Operator& op) {
    for (const OperatorTerm& term : op) {
      const Dependence reads = dependence(instance.graph, term.coefficient);
      slots.insert(reads.parameters.begin(), reads.parameters.end());
    }
  };
  collect(hamiltonian);
  for (const NoiseTerm& noise : instance.noise) collect(noise.op);
  return {slots.begin(), slots.end()};
}

runtime::Chip lower_chip(const Instance& instance, const RecognisedBaths& spectra, Lowering& lowering,
                         const SourceSet& sources) {
  runtime::Chip chip;
  chip.name = instance.chip;
  for (const InstanceQubit& qubit : instance.qubits) {
    chip.qubits.push_back({qubit.path, {}});
    if (qubit.offset) chip.qubits.back().offset = lowering.setting(*qubit.offset);
  }
  Operator fixed, driven;
  for (const EnergyTerm& term : instance.energy) {
    for (const OperatorTerm& part : term.op) {
      (dependence(instance.graph, part.coefficient).t ? driven : fixed).push_back(part);
    }
  }
  chip.hamiltonian = lowering.sum(fixed);
  chip.drive = lowering.sum(driven);
  for (std::size_t b = 0; b < instance.baths.size(); ++b) {
    chip.baths.push_back(lower_bath(instance.baths[b], spectra[b], instance, lowering, sources));
  }
  for (const NoiseTerm& noise : instance.noise) chip.couplings.push_back({lowering.sum(noise.op), noise.bath, noise.what});
  for (const CorrelationI& correlation : instance.correlations) {
    runtime::Correlation made{correlation.first, correlation.count, {}, sources.place(correlation.span)};
    for (const NodeId element : correlation.elements) made.elements.push_back(lowering.row(runtime::kSettings, element));
    chip.correlations.push_back(std::move(made));
  }
  for (const JumpTerm& jump : instance.jumps) chip.jumps.push_back({lowering.sum(jump.op), jump.what});
  chip.offsets_slot = slots_of(instance).offsets_on;
  chip.level_inputs = level_inputs(instance, fixed);
  return chip;
}

void append_spectra(const Instance& instance, const Lowering& lowering, ir::Module& module) {
  for (const InstanceBath& bath : instance.baths) {
    module.sets.push_back({"density of " + bath.name, {{"J", lowering.value(bath.density)}}, false, {}});
  }
}

}  // namespace

Lowered lower(Instance instance, const SourceSet& sources) {
  // What appends nodes comes first: values are made of the finished graph.
  const RecognisedBaths spectra = recognise_baths(instance);
  const std::vector<KinkCondition> kinks = find_kinks(instance.graph, coefficient_nodes(instance));
  Lowered result;
  ir::Module& module = result.module;
  module.name = instance.experiment;
  module.inputs = input_names(instance);
  Lowering lowering(instance, sources, module);
  runtime::Chip chip = lower_chip(instance, spectra, lowering, sources);
  for (const KinkCondition& kink : kinks) {
    chip.kinks.push_back({lowering.row(runtime::kKinks, kink.node), kink.levels});
  }
  const bool liouvillian = std::any_of(instance.equations.begin(), instance.equations.end(),
                                       [](const EquationI& equation) { return equation.kind == EquationKind::lindblad; });
  append_generators(chip, liouvillian, lowering.coefficients(), module);
  const ExperimentRows rows{[&](runtime::SetIndex set, NodeId node) { return lowering.row(set, node); },
                            [&](NodeId node) { return lowering.setting(node); },
                            [&](const Operator& op) { return lowering.sum(op); }};
  result.plan = lower_experiment(instance, sources, rows);
  result.plan.chip = std::move(chip);
  result.plan.reading_slot = slots_of(instance).readings;
  result.plan.observable_slot = slots_of(instance).observables;
  result.plan.under_slot = slots_of(instance).under;
  result.plan.left_out = left_out(result.plan);
  append_spectra(instance, lowering, module);
  return result;
}

}  // namespace tarn::compiler
