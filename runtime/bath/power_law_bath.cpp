#include "runtime/bath/power_law_bath.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "runtime/bath/special_functions.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// Step in log t. The integrand is analytic for |Im log t| < pi/4, so the error of the
/// trapezoidal rule is about exp(-2 pi (pi/4)/step) = 7e-18, times what the singularity of
/// order s + 1 on the edge of that strip adds: steps shrink with s.
double step_for(double s) { return 0.125 / (1.0 + 0.15 * std::max(0.0, s - 1.0)); }
/// Range of log(t cutoff): below, t C is under 1e-17 of its peak; above, the algebraic
/// tail of C leaves less than 1e-18 of lambda.
constexpr double kFirst = -40.0;
constexpr double kLast = 46.0;

}  // namespace

Complex power_law_correlation(const PowerLaw& law, double theta, Complex t) {
  const double order = law.s + 1.0;
  const Complex i(0.0, 1.0);
  const Complex z = 1.0 / law.cutoff + i * t;
  const Complex y = 1.0 / law.cutoff - i * t;
  Complex sum = std::exp(-order * std::log(law.cutoff * z));
  if (theta > 0.0) {
    const double ratio = std::pow(theta / law.cutoff, order);
    sum += ratio * (hurwitz_zeta(order, 1.0 + theta * z) + hurwitz_zeta(order, 1.0 + theta * y));
  }
  return law.eta * law.cutoff * law.cutoff * std::tgamma(order) * sum;
}

PowerLawTransform::PowerLawTransform(const PowerLaw& law, double theta) {
  const Complex direction = std::polar(1.0, std::numbers::pi / 4);
  const double step = step_for(law.s);
  for (double x = kFirst; x <= kLast; x += step) {
    const Complex t = std::exp(x) / law.cutoff * direction;
    time_.push_back(t);
    emission_.push_back(step * t * power_law_correlation(law, theta, t));
    absorption_.push_back(step * std::conj(t) * power_law_correlation(law, theta, std::conj(t)));
  }
}

Complex PowerLawTransform::operator()(double w) const {
  const Complex rotation = Complex(0.0, 1.0) * w;
  const auto& weight = w > 0.0 ? emission_ : absorption_;
  constexpr double kGone = 50.0;
  constexpr double kOne = 1e-18;
  Complex sum = 0.0;
  for (std::size_t k = 0; k < time_.size(); ++k) {
    const Complex exponent = rotation * (w > 0.0 ? time_[k] : std::conj(time_[k]));
    if (exponent.real() < -kGone) break;
    sum += exponent.real() > -kOne ? weight[k] : weight[k] * std::exp(exponent);
  }
  return sum;
}

double cold_ohmic_shift(double eta, double cutoff, double w) {
  const double x = w / cutoff;
  const double product = x == 0.0 ? 0.0 : x * exp_integral_ei_scaled(x);
  return eta * cutoff * (product - 1.0);
}

}  // namespace tarn::runtime
