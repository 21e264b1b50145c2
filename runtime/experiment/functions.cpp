#include "runtime/experiment/functions.h"

#include <fmt/format.h>

#include <cmath>

#include "lang/support/check.h"

namespace tarn::runtime {

Functions::Functions(const Kernel& kernel, std::span<const TableNumbers> tables, const Plan& plan)
    : kernel_(kernel), block_(kernel, tables) {
  for (const Parameter& parameter : plan.parameters) block_.set(parameter.slot, parameter.value);
  block_.set(plan.chip.offsets_slot, 1);
}

std::vector<double> Functions::call(tarn_values_fn function, std::uint32_t set, std::span<const double> s,
                                    std::span<const double> t, std::span<const double> w) const {
  std::vector<double> out(kernel_.rows(set) * s.size());
  if (out.empty()) return out;
  const tarn_status status = function(block_.block(), s.size(), s.data(), t.data(), w.data(), out.data());
  TARN_CHECK(status != TARN_BAD_ARGUMENT);
  return out;
}

std::vector<double> Functions::values(std::uint32_t set, double s, double t) const {
  const double w = 0;
  return call(kernel_.values(set), set, {&s, 1}, {&t, 1}, {&w, 1});
}

std::vector<double> Functions::along(std::uint32_t set, std::span<const double> s) const {
  const std::vector<double> zeros(s.size(), 0.0);
  return call(kernel_.values(set), set, s, zeros, zeros);
}

std::vector<double> Functions::at(std::uint32_t set, std::span<const double> s, std::span<const double> t) const {
  const std::vector<double> zeros(s.size(), 0.0);
  return call(kernel_.values(set), set, s, t, zeros);
}

std::vector<double> Functions::slopes_along(std::uint32_t set, std::span<const double> s) const {
  TARN_CHECK(kernel_.derivatives(set) != nullptr);
  const std::vector<double> zeros(s.size(), 0.0);
  return call(kernel_.derivatives(set), set, s, zeros, zeros);
}

std::vector<double> Functions::spectrum(std::uint32_t set, std::span<const double> w) const {
  const std::vector<double> zeros(w.size(), 0.0);
  return call(kernel_.values(set), set, zeros, zeros, w);
}

Result<double, RunError> finite_setting(const Setting& setting, std::span<const double> settings, const char* what) {
  const double value = settings[setting.row];
  if (std::isfinite(value)) return value;
  return Unexpected{RunError{"not_finite", fmt::format("{} is not finite here", what), setting.place}};
}

}  // namespace tarn::runtime
