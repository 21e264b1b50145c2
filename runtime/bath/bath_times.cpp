#include "runtime/bath/bath_times.h"

#include <algorithm>
#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <cmath>
#include <limits>

#include "runtime/bath/correlation.h"

namespace tarn::runtime {
namespace {

using Correlation = std::function<std::complex<double>(double)>;

/// int |C| and int t |C| over a range of t, with estimates of their errors.
struct Moments {
  double zeroth = 0.0;
  double first = 0.0;
  double zeroth_error = 0.0;
  double first_error = 0.0;
};

void add(Moments& sum, const Moments& part) {
  sum.zeroth += part.zeroth;
  sum.first += part.first;
  sum.zeroth_error += part.zeroth_error;
  sum.first_error += part.first_error;
}

/// Relative to the sums so far. The C of a table keeps its absolute, not its relative
/// accuracy at long times, so the demand on a panel must not be relative to the panel.
constexpr double kZerothTolerance = 1e-12;
constexpr double kFirstTolerance = 3e-11;
constexpr int kMostHalvings = 10;

Moments moments(const Correlation& c, double a, double b, const Moments& before, int depth = 0) {
  using Rule = boost::math::quadrature::gauss_kronrod<double, 31>;
  const double half = 0.5 * (b - a);
  // Both at once: a complex integrand costs one evaluation of C. On [-1, 1], because Boost
  // 1.74 does not scale its error estimate with the interval.
  const auto integrand = [&](double u) {
    const double t = a + half * (1.0 + u);
    return half * std::abs(c(t)) * std::complex<double>(1.0, t / b);
  };
  double error = 0.0;
  const std::complex<double> value = Rule::integrate(integrand, -1.0, 1.0, 0, 0.0, &error);
  Moments part{value.real(), value.imag() * b, error, error * b};
  const bool zeroth_good = error <= kZerothTolerance * (before.zeroth + part.zeroth);
  const bool first_good = error * b <= kFirstTolerance * (before.first + part.first);
  if ((zeroth_good && first_good) || depth == kMostHalvings) return part;
  const double middle = 0.5 * (a + b);
  part = moments(c, a, middle, before, depth + 1);
  add(part, moments(c, middle, b, before, depth + 1));
  return part;
}

/// The first octave starts at this part of the shorter of time scale and run length: what
/// lies below holds less than 1e-11 of the integrals even where C diverges as a logarithm,
/// and is integrated all the same.
constexpr double kStart = 1e-13;
constexpr int kOctaves = 100;
constexpr int kHopeless = 14;

/// Sums octaves of int |C| beyond `from`, then continues them as the geometric series that
/// a power law or anything faster makes. Empty where the series does not converge.
std::optional<Moments> tail(const Correlation& c, double from, Moments sum) {
  constexpr double kDone = 1e-12;
  // Slower than t^-1.04 cannot be told from 1/t.
  constexpr double kLargestRatio = 0.97;
  constexpr double kRounding = 1e-7;
  sum.first = std::numeric_limits<double>::infinity();  // not wanted here: nothing to refine for it
  double before = 0.0;
  double ratio_before = 0.0;
  for (int octave = 0; octave < kOctaves; ++octave, from *= 2.0) {
    const Moments part = moments(c, from, 2.0 * from, sum);
    const double ratio = before > 0.0 ? part.zeroth / before : 0.0;
    const double rest = part.zeroth * ratio / std::max(1.0 - ratio, 1.0 - kLargestRatio);
    const double drift = std::abs(ratio - ratio_before);
    // Beyond here C is its own rounding error: the octaves grow again.
    const bool rounding = octave > 1 && ratio > kLargestRatio && part.zeroth < kRounding * sum.zeroth;
    add(sum, rounding ? Moments{before, 0.0, before, 0.0} : part);
    if (rounding || part.zeroth <= kDone * sum.zeroth) return sum;
    if (octave > 4 && ratio < kLargestRatio && drift * rest < kDone * sum.zeroth) {
      add(sum, {rest, 0.0, rest * drift, 0.0});
      return sum;
    }
    if (octave > kHopeless && ratio > kLargestRatio) return std::nullopt;
    before = part.zeroth;
    ratio_before = ratio;
  }
  return std::nullopt;
}

/// The row of the first component whose J jumps by a part that matters, if any: |C| then
/// falls as 1/t and its integral diverges.
std::optional<std::size_t> row_with_jump(const ThermalBath& bath) {
  constexpr double kStep = 1e-9;
  constexpr double kMatters = 1e-7;
  for (std::size_t row = 0; row < bath.components().size(); ++row) {
    const Component& component = bath.components()[row];
    std::vector<double> places;
    if (const auto* table = std::get_if<Tabulated>(&component)) places = {table->w.front(), table->w.back()};
    if (const auto* sampled = std::get_if<Sampled>(&component)) {
      places = sampled->breaks;
      places.push_back(sampled->low);
      places.push_back(sampled->high);
    }
    const auto thermal = [&](double w) {
      const double j = spectral_density(component, Eigen::ArrayXd::Constant(1, w))[0];
      return bath.theta() > 0.0 ? j / std::tanh(w / (2.0 * bath.theta())) : j;
    };
    const double size = thermal(support(component).scale) + thermal(0.5 * support(component).scale);
    for (const double w : places) {
      if (w <= 0.0 || !std::isfinite(w)) continue;
      if (std::abs(thermal(w * (1.0 + kStep)) - thermal(w * (1.0 - kStep))) > kMatters * size) return row;
    }
  }
  return std::nullopt;
}

double time_scale_of(const ThermalBath& bath) {
  double frequency = 0.0;
  for (const Component& component : bath.components()) frequency = std::max(frequency, support(component).scale);
  return frequency > 0.0 ? 1.0 / frequency : 1.0;
}

}  // namespace

std::optional<BathTimes> bath_times(const Correlation& c, double time_scale, double run_length) {
  Moments sum;
  const int octaves = static_cast<int>(std::ceil(std::log2(run_length / (kStart * std::min(time_scale, run_length)))));
  double from = std::ldexp(run_length, -octaves);
  add(sum, moments(c, 0.0, from, sum));
  for (int k = 0; k < octaves; ++k, from *= 2.0) add(sum, moments(c, from, 2.0 * from, sum));
  const auto whole = tail(c, run_length, sum);
  if (!whole) return std::nullopt;
  if (whole->zeroth == 0.0) return BathTimes{std::numeric_limits<double>::infinity(), 0.0, 0.0, 0.0};
  const double tau_sb = 1.0 / whole->zeroth;
  const double relative = whole->zeroth_error * tau_sb;
  return BathTimes{tau_sb, sum.first * tau_sb, tau_sb * relative, tau_sb * (sum.first_error + sum.first * relative)};
}

Result<BathTimes, BathError> bath_times(const ThermalBath& bath, double run_length) {
  if (!std::isfinite(run_length) || run_length <= 0.0)
    return Unexpected{BathError{BathErrorCode::out_of_range, 0, "length of the run", run_length, "> 0"}};
  const auto rate = bath.zero_rate();
  if (!rate) return Unexpected{rate.error()};
  const auto jump = row_with_jump(bath);
  const BathError diverges{BathErrorCode::times_diverge, jump.value_or(0), "", 0.0, ""};
  if (jump) return Unexpected{diverges};
  const CorrelationFunction c(bath);
  const auto times = bath_times([&c](double t) { return c.at(t); }, time_scale_of(bath), run_length);
  if (!times) return Unexpected{diverges};
  return *times;
}

}  // namespace tarn::runtime
