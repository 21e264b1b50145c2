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

/// Internal units in those that answers are shown in: hbar and kB are the SI's exact values.
constexpr double kGigahertz = 2 * std::numbers::pi;                                            // [rad/ns]
constexpr double kMillikelvin = 1.380649e-23 * 1e-3 / (6.62607015e-34 / kGigahertz) * 1e-9;    // kB T/hbar [rad/ns]

/// A number of a bath in its unit; eta and exponents are plain.
std::string shown_value(std::string_view parameter, double value) {
  if (parameter == "temperature") return fmt::format("{:.6g} mK", value / kMillikelvin);
  if (parameter == "eta" || parameter == "s" || parameter.starts_with("rows")) return fmt::format("{:.6g}", value);
  return fmt::format("{:.6g} GHz", value / kGigahertz);
}

std::string_view name_of(std::string_view parameter) {
  if (parameter == "eta") return "strength";
  if (parameter == "s") return "exponent";
  return parameter;
}

/// What is wrong with a bath's numbers, in the user's units, and what would mend it.
std::string fault_of(const BathError& error) {
  const std::string value = shown_value(error.parameter, error.value);
  const std::string_view name = name_of(error.parameter);
  switch (error.code) {
    case BathErrorCode::out_of_range:
    case BathErrorCode::bad_table:
      return fmt::format("its {} is {}; it must be {}", name, value, error.range);
    case BathErrorCode::negative_density:
      return fmt::format("J(w) is negative or not finite at w = {:.6g} GHz; limit its band or correct it",
                         error.value / kGigahertz);
    case BathErrorCode::zero_rate_diverges:
      return "its rate at zero frequency is infinite; give J(w) that falls with w at small w, at least as w";
    case BathErrorCode::times_diverge: return to_text(error);
  }
  return {};
}

}  // namespace

RunError bath_error(const Plan& plan, std::uint32_t row, const BathError& error) {
  const Bath& bath = plan.chip.baths[row];
  return {"bad_bath", fmt::format("bath `{}`: {}", bath.name, fault_of(error)), bath.place};
}

Result<ThermalBath, RunError> make_bath(const Plan& plan, std::uint32_t row, std::span<const double> settings,
                                        std::shared_ptr<const Functions> functions) {
  const Bath& bath = plan.chip.baths[row];
  SpectralDensity density;
  for (const SpectralForm& form : bath.components) {
    density.push_back(std::visit(Filled{settings, kSpectra + row, functions}, form));
  }
  auto made = ThermalBath::make(std::move(density), settings[bath.temperature.row]);
  if (made) return made.value();
  return Unexpected{bath_error(plan, row, made.error())};
}

std::vector<double> bath_fingerprint(const Plan& plan, std::uint32_t row, std::span<const double> settings,
                                     const Functions& functions) {
  const Bath& bath = plan.chip.baths[row];
  std::vector<double> numbers = {settings[bath.temperature.row]};
  for (const std::uint32_t slot : bath.inputs) numbers.push_back(functions.input(slot));
  return numbers;
}

}  // namespace tarn::runtime
