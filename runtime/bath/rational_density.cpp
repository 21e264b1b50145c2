#include "runtime/bath/rational_density.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "runtime/bath/special_functions.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Poles = std::vector<DensityPole>;
constexpr double kPi = std::numbers::pi;
constexpr Complex kI{0.0, 1.0};

/// Closer to a coincidence than this (in units of the spacing), the limit is interpolated:
/// rounding costs 1e-16/kNear, interpolation kNear^4.
constexpr double kNear = 2e-4;

Poles exact_poles(const Drude& d) { return {{d.cutoff, 0.5 * d.eta * d.cutoff * d.cutoff}}; }

Poles exact_poles(const LorentzianPeak& p) {
  const Complex half = 0.5 * p.width;
  const Complex ringing = std::sqrt(Complex(p.centre * p.centre) - half * half);
  const Complex residue = kI * p.strength * p.centre * p.centre / (2.0 * kPi * ringing);
  // The smaller of two real rates would lose its digits in the difference.
  const Complex fast = half.real() > p.centre ? half + std::abs(ringing) : half + kI * ringing;
  const Complex slow = p.centre * p.centre / fast;
  const bool overdamped = half.real() > p.centre;
  // For real rates ringing = i |ringing|, so half + i ringing is the slow one.
  return {{overdamped ? slow : fast, residue}, {overdamped ? fast : slow, -residue}};
}

/// The largest Matsubara index that a rate of the set nearly meets, 0 if none does.
double matsubara_index(const Poles& poles, double theta) {
  double index = 0.0;
  if (theta == 0.0) return index;
  for (const DensityPole& pole : poles) {
    const Complex a = pole.rate / (2.0 * kPi * theta);
    const double nearest = std::round(a.real());
    if (nearest >= 1.0 && std::abs(a - nearest) < kNear) index = std::max(index, nearest);
  }
  return index;
}

/// Cubic interpolation at the middle of four densities at distances -2, -1, 1, 2 steps.
template <class Density>
Poles interpolated(Density density, double Density::*parameter, double step) {
  constexpr double kOuter = -1.0 / 6.0;
  constexpr double kInner = 2.0 / 3.0;
  const double middle = density.*parameter;
  Poles all;
  for (const double steps : {-2.0, -1.0, 1.0, 2.0}) {
    const double weight = std::abs(steps) > 1.0 ? kOuter : kInner;
    density.*parameter = middle * (1.0 + steps * step);
    for (const DensityPole& pole : exact_poles(density)) all.push_back({pole.rate, weight * pole.residue});
  }
  return all;
}

/// c_p = -2 pi i r / (1 - exp(i nu/theta)) with nu/theta = 2 pi a. Written so that nothing
/// overflows, and so that its pole at a whole number cancels that of the Matsubara sum, which
/// is a function of the same rounded a.
Complex pole_amplitude(const DensityPole& pole, Complex a) {
  const Complex reduced = kPi * (a - std::round(a.real()));
  if (std::abs(reduced.imag()) < 1.0) return kPi * pole.residue * std::exp(-kI * reduced) / std::sin(reduced);
  const Complex exponent = 2.0 * kI * reduced;
  if (exponent.real() < 0.0) return -2.0 * kPi * kI * pole.residue / (1.0 - std::exp(exponent));
  const Complex decay = std::exp(-exponent);
  return 2.0 * kPi * kI * pole.residue * decay / (1.0 - decay);
}

Complex residue_sum(const Poles& poles, double& size) {
  Complex sum = 0.0;
  size = 0.0;
  for (const DensityPole& pole : poles) {
    sum += pole.residue;
    size += std::abs(pole.residue);
  }
  return sum;
}

/// int_0^inf dx exp(-i x t)/(x + i nu), with the branch that is continuous in nu.
Complex cold_exponential(Complex nu, double t) {
  const Complex z = -nu * t;
  const Complex value = exp_integral_e1_scaled(z);
  return z.imag() < 0.0 ? value - 2.0 * kPi * kI * std::exp(z) : value;
}

Complex cold_correlation(const Poles& poles, double t) {
  Complex sum = 0.0;
  for (const auto& [rate, residue] : poles)
    sum += t > 0.0 ? residue * (cold_exponential(rate, t) + exp_integral_e1_scaled(rate * t))
                   : -residue * (std::log(kI * rate) + std::log(-kI * rate));
  return sum;
}

Complex cold_transform(const Poles& poles, double w) {
  const double logarithm = w == 0.0 ? 0.0 : std::log(std::abs(w));
  Complex shift = 0.0;
  for (const auto& [rate, residue] : poles)
    for (const Complex b : {kI * rate, -kI * rate}) shift += residue * (logarithm - std::log(b)) / (w + b);
  return {0.0, shift.real()};
}

}  // namespace

Poles poles_of(const Drude& drude, double theta) {
  const Poles poles = exact_poles(drude);
  const double index = matsubara_index(poles, theta);
  return index > 0.0 ? interpolated(drude, &Drude::cutoff, 2.0 * kNear / index) : poles;
}

Poles poles_of(const LorentzianPeak& peak, double theta) {
  const bool critical = std::abs(peak.width - 2.0 * peak.centre) < kNear * peak.centre;
  const Poles poles = critical ? Poles{} : exact_poles(peak);
  const double index = matsubara_index(poles, theta);
  if (!critical && index == 0.0) return poles;
  return interpolated(peak, &LorentzianPeak::width, 2.0 * kNear / std::max(1.0, index));
}

Complex rational_correlation(const Poles& poles, double theta, double t) {
  if (t == 0.0) {
    double size = 0.0;
    const Complex sum = residue_sum(poles, size);
    if (std::abs(sum) > 1e-9 * size) return std::numeric_limits<double>::infinity();
  }
  if (theta == 0.0) return cold_correlation(poles, t);
  const double first = 2.0 * kPi * theta;
  Complex sum = 0.0;
  for (const DensityPole& pole : poles) {
    const Complex a = pole.rate / first;
    sum += pole_amplitude(pole, a) * std::exp(-pole.rate * t);
    sum += pole.residue * (lerch_sum(first * t, -a) + lerch_sum(first * t, a));
  }
  return sum;
}

Complex rational_transform(const Poles& poles, double theta, double w) {
  if (theta == 0.0) return cold_transform(poles, w);
  const double first = 2.0 * kPi * theta;
  const Complex y = -kI * (w / first);
  const Complex psi_w = digamma(1.0 + y);
  Complex sum = 0.0;
  for (const DensityPole& pole : poles) {
    const Complex a = pole.rate / first;
    // sum over k of 1/((k + v)(k + y)) = [psi(1 + v) - psi(1 + y)]/(v - y)
    const Complex lower = (digamma(1.0 - a) - psi_w) / (-a - y);
    const Complex upper = (digamma(1.0 + a) - psi_w) / (a - y);
    sum += pole_amplitude(pole, a) / (pole.rate - kI * w) + pole.residue / first * (lower + upper);
  }
  return sum;
}

}  // namespace tarn::runtime
