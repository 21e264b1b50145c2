#include "runtime/experiment/begin.h"

#include <fmt/format.h>

#include <cmath>

#include "lang/support/check.h"
#include "runtime/experiment/words.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {
namespace {

using Eigen::Index;

constexpr double kNegligible = 1e-16;

Mixture pure(Ket ket) { return {{std::move(ket)}, {1.0}}; }

/// Levels with weights, shared evenly within coinciding levels.
Mixture mixture_of(const Levels& levels, const Eigen::VectorXd& weights) {
  Mixture mixture;
  const double total = weights.sum(), largest = weights.maxCoeff();
  for (Index first = 0; first < levels.energies.size();) {
    const Index last = coinciding(levels, first).second;
    double shared = 0;
    for (Index k = first; k < std::min(last, weights.size()); ++k) shared += weights[k];
    shared /= static_cast<double>(last - first);
    for (Index k = first; k < last && shared > kNegligible * largest; ++k) {
      mixture.kets.push_back(levels.vectors.col(k));
      mixture.weights.push_back(shared / total);
    }
    first = last;
  }
  return mixture;
}

Result<double, RunError> common_temperature(const Plan& plan, std::span<const double> settings) {
  if (plan.chip.baths.empty()) {
    return Unexpected{RunError{"no_common_temperature", "`begin thermal` without a bath needs a temperature: thermal(20 mK)"}};
  }
  const auto first = finite_setting(plan.chip.baths.front().temperature, settings, "a temperature");
  if (!first) return first;
  for (const Bath& bath : plan.chip.baths) {
    const auto other = finite_setting(bath.temperature, settings, "a temperature");
    if (!other) return other;
    if (std::abs(*other - *first) > 1e-12 * std::abs(*first)) {
      return Unexpected{RunError{"no_common_temperature",
                                 "the baths have different temperatures; say which one: thermal(20 mK)"}};
    }
  }
  return first;
}

/// Builds the state for each form of `begin`.
struct Builder {
  const Plan& plan;
  ChipLevels& levels;
  double s;
  std::span<const double> settings;

  Result<Mixture, RunError> operator()(const BeginGround&) const {
    const auto found = levels.lowest(s, 1);
    if (!found) return Unexpected{found.error()};
    return mixture_of(**found, Eigen::VectorXd::Ones(1));
  }
  Result<Mixture, RunError> operator()(const BeginPlus&) const {
    return pure(product_state(std::string(plan.chip.qubits.size(), '+')));
  }
  Result<Mixture, RunError> operator()(const BeginState& state) const { return pure(product_state(state.letters)); }
  Result<Mixture, RunError> operator()(const BeginThermal& thermal) const;
  Result<Mixture, RunError> operator()(const BeginPopulations& populations) const;
  Result<Mixture, RunError> operator()(const BeginSteady&) const {
    return Unexpected{RunError{"no_steady_state", "this equation has no stationary state of its own"}};
  }
};

Result<Mixture, RunError> Builder::operator()(const BeginThermal& thermal) const {
  const auto theta = thermal.temperature ? finite_setting(*thermal.temperature, settings, "the temperature")
                                         : common_temperature(plan, settings);
  if (!theta) return Unexpected{theta.error()};
  if (*theta < 0) {
    return Unexpected{RunError{"negative_temperature", "`begin thermal` needs a temperature of 0 K or above",
                               thermal.temperature ? thermal.temperature->place : Place{}}};
  }
  if (*theta == 0) return (*this)(BeginGround{});
  // Beyond 40 theta a level's weight is below rounding.
  const auto found = levels.within(s, 40 * *theta);
  if (!found) return Unexpected{found.error()};
  return mixture_of(**found, (((*found)->energies[0] - (*found)->energies.array()) / *theta).exp().matrix());
}

Result<Mixture, RunError> Builder::operator()(const BeginPopulations& populations) const {
  Eigen::VectorXd weights(static_cast<Index>(populations.weights.size()));
  for (Index k = 0; k < weights.size(); ++k) {
    const Setting& setting = populations.weights[static_cast<std::size_t>(k)];
    const auto weight = finite_setting(setting, settings, "a population");
    if (!weight) return Unexpected{weight.error()};
    if (*weight < 0) return Unexpected{RunError{"bad_populations", "a population is negative", setting.place}};
    weights[k] = *weight;
  }
  TARN_CHECK(weights.size() > 0);
  const Place& place = populations.weights.front().place;
  if (std::abs(weights.sum() - 1) > 1e-9) {
    return Unexpected{RunError{"bad_populations", fmt::format("the populations sum to {:.10g}, not to 1", weights.sum()), place}};
  }
  const auto found = levels.lowest(s, weights.size());
  if (!found) return Unexpected{found.error()};
  if ((*found)->energies.size() < weights.size()) {
    return Unexpected{RunError{"bad_populations", fmt::format("the chip has {} levels only", (*found)->energies.size()), place}};
  }
  return mixture_of(**found, weights);
}

}  // namespace

Density density_of(const Mixture& mixture) {
  const Index size = mixture.kets.front().size();
  Density rho = Density::Zero(size, size);
  for (std::size_t k = 0; k < mixture.kets.size(); ++k) {
    rho += mixture.weights[k] * mixture.kets[k] * mixture.kets[k].adjoint();
  }
  return rho;
}

Mixture mixture_of(const Density& rho) {
  const Eigensystem<std::complex<double>> parts = eigensystem(rho);
  Mixture mixture;
  const double largest = parts.values.cwiseAbs().maxCoeff();
  for (Index k = 0; k < parts.values.size(); ++k) {
    if (std::abs(parts.values[k]) <= kNegligible * largest) continue;
    mixture.kets.push_back(parts.vectors.col(k));
    mixture.weights.push_back(parts.values[k]);
  }
  return mixture;
}

Result<Mixture, RunError> begin_state(const Plan& plan, ChipLevels& levels, double first_s,
                                      std::span<const double> settings) {
  TARN_CHECK(plan.begin);
  return std::visit(Builder{plan, levels, first_s, settings}, *plan.begin);
}

}  // namespace tarn::runtime
