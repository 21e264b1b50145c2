#include "runtime/experiment/bath_of_plan.h"

#include <fmt/format.h>

#include <cmath>
#include <numbers>

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
    // The plan's strength times width is 2/pi of the reorganisation energy.
    const double lambda = 0.5 * std::numbers::pi * settings[form.strength] * settings[form.width];
    return LorentzianPeak{lambda, settings[form.centre], settings[form.width]};
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

/// The rows of the settings that a form reads.
struct RowsOf {
  std::vector<std::uint32_t> operator()(const PowerLawForm& f) const { return {f.strength, f.cutoff, f.exponent}; }
  std::vector<std::uint32_t> operator()(const DrudeForm& f) const { return {f.strength, f.cutoff}; }
  std::vector<std::uint32_t> operator()(const PeakForm& f) const { return {f.strength, f.centre, f.width}; }
  std::vector<std::uint32_t> operator()(const TableForm& f) const { return {f.scale}; }
  std::vector<std::uint32_t> operator()(const GeneralForm&) const { return {}; }
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
  bool general = false;
  for (const SpectralForm& form : bath.components) {
    for (const std::uint32_t setting : std::visit(RowsOf{}, form)) numbers.push_back(settings[setting]);
    general |= std::holds_alternative<GeneralForm>(form);
  }
  if (!general) return numbers;
  std::vector<double> w;
  for (int i = -120; i <= 120; ++i) w.push_back(std::exp2(i / 6.0));
  for (const double j : functions.spectrum(kSpectra + row, w)) numbers.push_back(j);
  return numbers;
}

}  // namespace tarn::runtime
