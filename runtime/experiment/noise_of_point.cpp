#include "runtime/experiment/noise_of_point.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <utility>

#include "runtime/bath/bath_times.h"
#include "runtime/bath/half_range.h"
#include "runtime/experiment/bath_of_plan.h"
#include "runtime/experiment/lowest_levels.h"
#include "runtime/experiment/words.h"

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

/// A bound on |A| along s; exact for one Pauli word.
double largest_norm(const OperatorSum& op, const Functions& functions, const RangeOfS& range) {
  double norm = 0;
  for (const double x : {0.0, 0.25, 0.5, 0.75, 1.0}) {
    norm = std::max(norm, norm_bound(scaled_words(op, functions.values(kCoefficients, range.lowest + x * (range.highest - range.lowest), 0))));
  }
  return norm;
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

Result<BathTimes, RunError> bath_times_of_run(const Plan& plan, std::uint32_t bath, const ThermalBath& made, double duration) {
  auto times = bath_times(made, duration > 0 ? duration : 1.0);
  if (times && !(duration > 0) && std::isfinite(times->tau_sb)) times = bath_times(made, 10 * times->tau_sb);
  if (!times) return Unexpected{bath_error(plan, bath, times.error())};
  return *times;
}

double frequency_bound(const PlanModel& model, const Functions& functions, const RangeOfS& range) {
  constexpr int kPlaces = 32;
  constexpr double kToSpare = 1.1;
  double most = 1e-6;
  for (int k = 0; k <= kPlaces; ++k) {
    const double s = range.lowest + (range.highest - range.lowest) * k / kPlaces;
    const auto words = scaled_words(model.plan().chip.hamiltonian, functions.values(kCoefficients, s, 0));
    most = std::max(most, kToSpare * all_levels(dense_operator(words, model.plan().chip.qubits.size())).width);
  }
  return most;
}

Result<std::vector<double>, RunError> windows_of(const Plan& plan, const NoiseOperators& noise,
                                                 const ThermalBaths& baths,
                                                 const Functions& functions, const RangeOfS& range, const PointTask& task) {
  std::vector<double> windows;
  if (plan.choice.equation != Equation::coarse_grained) return windows;
  if (plan.choice.window) {
    const auto given = finite_setting(*plan.choice.window, task.settings(), "the window");
    if (!given) return Unexpected{given.error()};
    if (!(*given > 0)) {
      return Unexpected{RunError{"window_out_of_range", fmt::format("the window is {:.6g} ns; it must be above 0", *given), plan.choice.window->place}};
    }
    windows.assign(noise.ops.size(), *given);
    return windows;
  }
  for (std::size_t c = 0; c < noise.ops.size(); ++c) {
    const auto times = bath_times_of_run(plan, noise.bath[c], *baths[noise.bath[c]], task.timeline().duration());
    if (!times) return Unexpected{times.error()};
    const double mean = std::sqrt(times->tau_sb * times->tau_b) / largest_norm(noise.ops[c], functions, range);
    // A bath that is no bath has no time of its own; quarters of an octave let anneals of similar length share tables.
    windows.push_back(std::isfinite(mean) ? std::exp2(std::round(4 * std::log2(mean)) / 4) : mean);
  }
  return windows;
}

}  // namespace tarn::runtime
