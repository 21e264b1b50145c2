#include "runtime/experiment/noise_of_point.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <utility>

#include "runtime/bath/bath_times.h"
#include "runtime/bath/half_range.h"
#include "runtime/experiment/bath_of_plan.h"

namespace tarn::runtime {
namespace {

HalfRangeFunction half_range_of(const ThermalBath& bath, double width) {
  const auto made = std::make_shared<const HalfRange>(bath, width);
  return [=](std::span<const double> w, std::complex<double>* out) {
    const auto n = static_cast<Eigen::Index>(w.size());
    Eigen::Map<Eigen::ArrayXcd>(out, n) = (*made)(Eigen::Map<const Eigen::ArrayXd>(w.data(), n));
  };
}

GrowingFunction growing_of(const ThermalBath& bath, double duration) {
  const auto made = std::make_shared<const GrowingHalfRange>(bath, duration);
  return [=](double t, std::span<const double> w, std::complex<double>* out) {
    const auto n = static_cast<Eigen::Index>(w.size());
    Eigen::Map<Eigen::ArrayXcd>(out, n) = (*made)(t, Eigen::Map<const Eigen::ArrayXd>(w.data(), n));
  };
}

}  // namespace

Result<ThermalBaths, RunError> fast_baths(const Plan& plan, std::span<const double> settings,
                                          std::shared_ptr<const Functions> functions) {
  ThermalBaths baths;
  for (std::uint32_t b = 0; b < plan.chip.baths.size(); ++b) {
    auto bath = make_bath(plan, b, settings, functions);
    if (!bath) return Unexpected{bath.error()};
    if (const auto zero = bath->zero_rate(); !zero) return Unexpected{bath_error(plan, b, zero.error())};
    baths.push_back(std::make_shared<const ThermalBath>(std::move(bath).value()));
  }
  return baths;
}

Result<double, RunError> automatic_window(const Plan& plan, std::uint32_t bath, const ThermalBath& made, double norm,
                                          double duration) {
  auto times = bath_times(made, duration > 0 ? duration : 1.0);
  if (!times) return Unexpected{bath_error(plan, bath, times.error())};
  const double tau_sb = times->tau_sb / (norm * norm);
  if (std::isinf(tau_sb)) return std::numeric_limits<double>::infinity();
  if (!(duration > 0)) times = bath_times(made, 10 * tau_sb);
  if (!times) return Unexpected{bath_error(plan, bath, times.error())};
  return std::exp2(std::round(4 * std::log2(std::sqrt(tau_sb * times->tau_b))) / 4);
}

std::vector<FastBath> fast_noise_of(const EquationChoice& choice, const NoiseOperators& noise,
                                    const ThermalBaths& baths, double width,
                                    double duration, std::span<const double> windows) {
  std::map<std::pair<std::uint32_t, double>, FastBath> made;
  std::vector<FastBath> of_operator;
  for (std::size_t c = 0; c < noise.ops.size(); ++c) {
    const bool averaged = choice.equation == Equation::coarse_grained;
    const std::pair key(noise.bath[c], averaged ? windows[c] : 0.0);
    auto found = made.find(key);
    if (found == made.end()) {
      FastBath bath;
      const auto& thermal = baths[noise.bath[c]];
      if (choice.equation == Equation::redfield && choice.memory == Memory::growing) bath.growing = growing_of(*thermal, duration);
      else if (choice.equation == Equation::redfield) bath.half_range = half_range_of(*thermal, width);
      else bath.pair = std::make_shared<const PairFunctions>(averaged ? averaged_pair(*thermal, windows[c], width) : root_pair(*thermal, width));
      found = made.emplace(key, std::move(bath)).first;
    }
    of_operator.push_back(found->second);
  }
  return of_operator;
}

}  // namespace tarn::runtime
