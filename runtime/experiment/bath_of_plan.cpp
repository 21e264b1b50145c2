#include "runtime/experiment/bath_of_plan.h"

#include <fmt/format.h>

#include <cmath>

namespace tarn::runtime {
namespace {

/// A form with its numbers put in.
struct Filled {
  std::span<const double> settings;
  std::uint32_t set;  ///< Of the bath's spectrum.
  std::shared_ptr<const Functions> functions;

  Component operator()(const PowerLawForm& form) const {
    return PowerLaw{settings[form.strength], settings[form.cutoff], settings[form.exponent]};
  }
  Component operator()(const DrudeForm& form) const { return Drude{settings[form.strength], settings[form.cutoff]}; }
  Component operator()(const PeakForm& form) const {
    return LorentzianPeak{settings[form.strength], settings[form.centre], settings[form.width]};
  }
  Component operator()(const TableForm& form) const {
    Tabulated table{form.w, form.j, form.loglog ? Interpolation::log_log : Interpolation::linear};
    for (double& j : table.j) j *= settings[form.scale];
    return table;
  }
  Component operator()(const GeneralForm&) const {
    Sampled sampled;
    sampled.evaluate = [functions = functions, set = set](std::span<const double> w, double* j) {
      const std::vector<double> values = functions->spectrum(set, w);
      std::copy(values.begin(), values.end(), j);
    };
    return sampled;
  }
};

}  // namespace

Result<ThermalBath, RunError> make_bath(const Plan& plan, std::uint32_t row, std::span<const double> settings,
                                        std::shared_ptr<const Functions> functions) {
  const Bath& bath = plan.chip.baths[row];
  SpectralDensity density;
  for (const SpectralForm& form : bath.components) {
    density.push_back(std::visit(Filled{settings, kSpectra + row, functions}, form));
  }
  auto made = ThermalBath::make(std::move(density), settings[bath.temperature.row]);
  if (made) return made.value();
  return Unexpected{RunError{"bad_bath", fmt::format("bath `{}`: {}", bath.name, to_text(made.error())), bath.place}};
}

std::vector<double> bath_fingerprint(const Plan& plan, std::uint32_t row, std::span<const double> settings,
                                     const Functions& functions) {
  const Bath& bath = plan.chip.baths[row];
  std::vector<double> numbers = {settings[bath.temperature.row]};
  for (const std::uint32_t slot : bath.inputs) numbers.push_back(functions.input(slot));
  return numbers;
}

}  // namespace tarn::runtime
