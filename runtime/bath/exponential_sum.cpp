#include "runtime/bath/exponential_sum.h"

#include <Eigen/QR>
#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <optional>

#include "runtime/bath/bath_times.h"
#include "runtime/bath/correlation.h"
#include "runtime/bath/rational_density.h"
#include "runtime/bath/rational_fit.h"
#include "runtime/bath/shift.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Eigen::ArrayXcd;
using Eigen::ArrayXd;
using Eigen::ArrayXXd;
using Eigen::Index;
using Eigen::MatrixXd;
using Rates = std::vector<Complex>;
constexpr double kPiOfSum = std::numbers::pi;
constexpr Complex kImaginary{0.0, 1.0};
constexpr int kMostTerms = 40;

/// C at times evenly spaced in log t, and what integrals over t weigh them with.
struct CorrelationSamples {
  ArrayXd t;
  ArrayXd measure;
  ArrayXcd c;
  double time_scale;  ///< 1 over the highest frequency that matters [ns].
  double integral;    ///< int_0^T |C| dt
  double half_rate;   ///< gamma(0)/2
  double run_length;
  ArrayXd w;          ///< Where Gamma is compared; empty if C is.
  ArrayXcd transform; ///< Gamma there.
};

double highest_scale(const ThermalBath& bath) {
  double highest = 0.0;
  for (const Component& component : bath.components()) highest = std::max(highest, support(component).scale);
  return highest > 0.0 ? highest : 1.0;
}

/// w where J is worth a sample: even in log w, closer around peaks and rows.
ArrayXd sample_frequencies(const ThermalBath& bath, double low, double top) {
  constexpr int kPerOctave = 16;
  constexpr int kAroundPeak = 40;
  std::vector<double> w;
  const auto count = static_cast<int>(std::ceil(kPerOctave * std::log2(top / low)));
  for (int i = 0; i <= count; ++i) w.push_back(low * std::pow(top / low, static_cast<double>(i) / count));
  for (const Component& component : bath.components()) {
    if (const auto* peak = std::get_if<LorentzianPeak>(&component))
      for (int i = -kAroundPeak; i <= kAroundPeak; ++i) w.push_back(peak->centre + peak->width * std::sinh(0.1 * i));
    if (const auto* table = std::get_if<Tabulated>(&component)) {
      constexpr int kBetweenRows = 8;
      for (std::size_t row = 0; row + 1 < table->w.size(); ++row)
        for (int i = 0; i < kBetweenRows; ++i)
          w.push_back(table->w[row] + (table->w[row + 1] - table->w[row]) * (i + 0.5) / kBetweenRows);
    }
  }
  std::erase_if(w, [&](double x) { return !(x >= low && x <= top); });
  std::sort(w.begin(), w.end());
  constexpr double kSame = 1e-9;
  w.erase(std::unique(w.begin(), w.end(), [](double a, double b) { return b - a < kSame * b; }), w.end());
  return Eigen::Map<const ArrayXd>(w.data(), std::ssize(w));
}

CorrelationSamples sample_correlation(const ThermalBath& bath, double run_length, double w_max) {
  constexpr int kPerOctave = 48;
  constexpr double kShortest = 1e-8;
  CorrelationSamples s;
  s.time_scale = 1.0 / highest_scale(bath);
  const double first = kShortest * std::min(s.time_scale, run_length);
  const auto count = static_cast<Index>(std::ceil(kPerOctave * std::log2(run_length / first)));
  const double step = std::log(run_length / first) / static_cast<double>(count);
  s.t = first * (step * (ArrayXd::LinSpaced(count, 0.0, static_cast<double>(count) - 1.0) + 0.5)).exp();
  s.measure = step * s.t;
  s.c = CorrelationFunction(bath)(s.t);
  s.integral = (s.c.abs() * s.measure).sum();
  s.half_rate = 0.5 * bath.zero_rate().value();
  s.run_length = run_length;
  if (!std::isfinite(w_max)) return s;
  const ArrayXd half = sample_frequencies(bath, std::min(1.0 / run_length, 0.1 * w_max), w_max);
  s.w.resize(2 * half.size());
  s.w << half, -half;
  const ArrayXd shift = ShiftFunction(bath)(s.w);
  s.transform = 0.5 * bath.rate(s.w).cast<Complex>() + kImaginary * shift.cast<Complex>();
  return s;
}

ArrayXcd sum_at(const std::vector<Exponential>& terms, const ArrayXd& t) {
  ArrayXcd sum = ArrayXcd::Zero(t.size());
  for (const Exponential& term : terms) sum += term.coefficient * (-term.rate * t.cast<Complex>()).exp();
  return sum;
}

ExponentialSum finish(std::vector<Exponential> terms, const CorrelationSamples& s) {
  std::sort(terms.begin(), terms.end(), [](const Exponential& a, const Exponential& b) {
    return std::pair(a.rate.real(), a.rate.imag()) < std::pair(b.rate.real(), b.rate.imag());
  });
  ExponentialSum sum{std::move(terms), s.half_rate, 0.0};
  for (const Exponential& term : sum.terms) sum.rest -= (term.coefficient / term.rate).real();
  if (s.w.size() > 0) {
    ArrayXcd difference = s.transform;
    for (Index i = 0; i < s.w.size(); ++i) difference[i] -= half_range(sum, s.w[i]);
    sum.error = difference.abs().maxCoeff() / std::max(s.transform.abs().maxCoeff(), std::numeric_limits<double>::min());
  } else if (s.integral > 0.0) sum.error = ((s.c - sum_at(sum.terms, s.t)).abs() * s.measure).sum() / s.integral;
  return sum;
}

BathError refusal(std::string_view parameter, double value, std::string_view range, std::size_t row = 0) {
  return {BathErrorCode::out_of_range, row, parameter, value, range};
}

/// A pair of poles +-i xi of 1/(1 - exp(-x)) - 1/x - 1/2 and its weight eta.
struct BosePole {
  double xi;
  double eta;
};

/// 2/eigenvalue of the symmetric tridiagonal matrix with zero diagonal and 1/sqrt(b_m b_(m+1)) beside it,
/// b_m = 2 m + 1, m from `first`: the positive ones, descending.
std::vector<double> inverse_eigenvalues(int size, int first) {
  if (size < 2) return {};
  MatrixXd m = MatrixXd::Zero(size, size);
  for (int i = 0; i + 1 < size; ++i) {
    const double b = 2.0 * (first + i) + 1.0;
    m(i, i + 1) = m(i + 1, i) = 1.0 / std::sqrt(b * (b + 2.0));
  }
  const Eigen::VectorXd values = eigensystem(m).values;
  std::vector<double> all;
  for (int i = 0; i < size / 2; ++i) all.push_back(2.0 / values[size - 1 - i]);
  return all;
}

std::vector<BosePole> bose_poles(int count) {
  const std::vector<double> xi = inverse_eigenvalues(2 * count, 1);
  const std::vector<double> zeta = inverse_eigenvalues(2 * count - 1, 2);
  std::vector<BosePole> poles;
  for (std::size_t j = 0; j < xi.size(); ++j) {
    double eta = 0.5 * count * (2.0 * count + 3.0);
    std::size_t next = 0;
    for (std::size_t k = 0; k < xi.size(); ++k) {
      if (k == j) continue;
      const double zero = zeta[next++];
      eta *= (zero - xi[j]) * (zero + xi[j]) / ((xi[k] - xi[j]) * (xi[k] + xi[j]));
    }
    poles.push_back({xi[j], eta});
  }
  return poles;
}

/// Fills in what each term has in C(t)*: the conjugate of its partner's coefficient.
void pair_up(std::vector<Exponential>& terms) {
  for (Exponential& term : terms) {
    const auto distance = [&term](const Exponential& other) { return std::abs(other.rate - std::conj(term.rate)); };
    const auto partner = std::min_element(terms.begin(), terms.end(), [&](const Exponential& a, const Exponential& b) {
      return distance(a) < distance(b);
    });
    term.conjugate = std::conj(partner->coefficient);
  }
}

Result<std::vector<DensityPole>, BathError> rational_poles(const ThermalBath& bath) {
  if (bath.theta() == 0.0) return Unexpected{refusal("temperature", 0.0, "> 0")};
  std::vector<DensityPole> all;
  for (std::size_t row = 0; row < bath.components().size(); ++row) {
    const Component& component = bath.components()[row];
    std::vector<DensityPole> poles;
    if (const auto* c = std::get_if<Drude>(&component)) poles = poles_of(*c, bath.theta());
    else if (const auto* p = std::get_if<LorentzianPeak>(&component)) poles = poles_of(*p, bath.theta());
    else return Unexpected{refusal("density", 0.0, "that is rational (Drude, a Lorentzian peak)", row)};
    all.insert(all.end(), poles.begin(), poles.end());
  }
  return all;
}

ExponentialSum pade_of(const std::vector<DensityPole>& density, double theta, int count, const CorrelationSamples& s) {
  const std::vector<BosePole> bose = bose_poles(count);
  std::vector<Exponential> terms;
  for (const DensityPole& pole : density) {
    const Complex x = -kImaginary * pole.rate / theta;
    Complex occupation = 1.0 / x + 0.5;
    for (const auto& [xi, eta] : bose) occupation += 2.0 * eta * x / ((x - kImaginary * xi) * (x + kImaginary * xi));
    terms.push_back({-2.0 * kPiOfSum * kImaginary * pole.residue * occupation, 0.0, pole.rate});
  }
  for (const auto& [xi, eta] : bose) {
    const double rate = theta * xi;
    Complex sum = 0.0;
    for (const DensityPole& pole : density) sum += pole.residue / ((pole.rate - rate) * (pole.rate + rate));
    terms.push_back({-4.0 * kPiOfSum * theta * eta * rate * sum.real(), 0.0, rate});
  }
  pair_up(terms);
  return finish(std::move(terms), s);
}

/// Least squares to C with the rates given, errors weighed with t plus the shortest time scale: the
/// error falls as 1/t. `rates` has one of each conjugate pair, the one with positive imaginary part.
std::vector<Exponential> fit_coefficients(const Rates& rates, const CorrelationSamples& s) {
  const ArrayXd weight = s.t + s.time_scale;
  Index unknowns = 0;
  for (const Complex rate : rates) unknowns += rate.imag() == 0.0 ? 1 : 2;
  if (unknowns == 0) return {};
  MatrixXd basis(s.t.size(), unknowns);
  Index column = 0;
  for (const Complex rate : rates) {
    const ArrayXcd decay = (-rate * s.t.cast<Complex>()).exp();
    basis.col(column++) = weight * decay.real();
    if (rate.imag() != 0.0) basis.col(column++) = weight * decay.imag();
  }
  const Eigen::VectorXd scale = basis.colwise().norm().cwiseMax(1e-300);
  basis *= scale.cwiseInverse().asDiagonal();
  MatrixXd target(s.t.size(), 2);
  target.col(0) = weight * s.c.real();
  target.col(1) = weight * s.c.imag();
  MatrixXd x = basis.colPivHouseholderQr().solve(target);
  x.array().colwise() /= scale.array();
  std::vector<Exponential> terms;
  column = 0;
  for (const Complex rate : rates) {
    const Index real = column++;
    if (rate.imag() == 0.0) {
      terms.push_back({{x(real, 0), x(real, 1)}, {x(real, 0), -x(real, 1)}, rate});
      continue;
    }
    // p Re e + q Im e, e = exp(-rate t), is (p - i q)/2 e + (p + i q)/2 e*.
    const Index imaginary = column++;
    const auto half = [&](Index part) { return 0.5 * Complex(x(real, part), -x(imaginary, part)); };
    const auto add = [&](Complex a, Complex b, Complex nu) { terms.push_back({a + kImaginary * b, a - kImaginary * b, nu}); };
    add(half(0), half(1), rate);
    add(std::conj(half(0)), std::conj(half(1)), std::conj(rate));
  }
  return terms;
}

/// One of each conjugate pair of rates that decay.
Rates without_partners(const Rates& all) {
  // What lies next to the imaginary axis is an artefact; next to the real one, real to rounding.
  constexpr double kDecays = 1e-9;
  constexpr double kReal = 1e-9;
  Rates kept;
  for (const Complex rate : all) {
    if (!(rate.real() > kDecays * std::abs(rate))) continue;
    if (std::abs(rate.imag()) < kReal * std::abs(rate)) kept.emplace_back(rate.real());
    else if (rate.imag() > 0.0) kept.push_back(rate);
  }
  return kept;
}

/// Sums of growing length from the same samples of J.
class CorrelationFit {
 public:
  CorrelationFit(const ThermalBath& bath, const CorrelationSamples& samples)
      : samples_(samples), slowest_(kLowest / samples.run_length), fit_(fit_density(bath, samples.run_length)) {}

  bool grow() { return fit_.error() > kEnough && fit_.grow(); }

  ExponentialSum sum() const {
    Rates rates;
    // Below the slowest frequency asked for poles have nothing to do.
    for (const Complex pole : fit_.poles())
      if (const Complex rate = std::sqrt(-pole); std::abs(rate) > slowest_) rates.push_back(rate);
    return finish(fit_coefficients(without_partners(rates), samples_), samples_);
  }

 private:
  static constexpr double kLowest = 0.1;   // in units of 1/run_length
  static constexpr double kHighest = 1e5;  // in units of the highest scale, where its density reaches as far
  static constexpr double kEnough = 1e-12;

  static RationalFit fit_density(const ThermalBath& bath, double run_length) {
    double top = 0.0;
    for (const Component& component : bath.components())
      top = std::max(top, std::min(support(component).high, kHighest * support(component).scale));
    const ArrayXd w = sample_frequencies(bath, std::min(kLowest / run_length, 1e-3 * top), top);
    ArrayXXd values(w.size(), 2);
    values.col(0) = (bath.rate(w) + bath.rate(-w)) / (2.0 * kPiOfSum);
    values.col(1) = bath.density(w) / w;
    const double scale = values.col(0).maxCoeff();
    ArrayXXd weights(w.size(), 2);
    weights.col(0).setConstant(1.0 / scale);
    weights.col(1) = w / scale;
    return RationalFit(w.square(), values, weights);
  }

  const CorrelationSamples& samples_;
  double slowest_;
  RationalFit fit_;
};

std::optional<BathError> refusal_of(const ThermalBath& bath, double run_length, double w_max) {
  if (!(w_max > 0.0)) return refusal("highest frequency of the sum", w_max, "> 0");
  const auto times = bath_times(bath, run_length);
  if (times) return std::nullopt;
  return times.error();
}

bool is_no_bath(const CorrelationSamples& s) { return s.integral == 0.0; }

}  // namespace

Result<ExponentialSum, BathError> pade_sum(const ThermalBath& bath, int count, double run_length, double w_max) {
  if (count < 1) return Unexpected{refusal("number of terms", count, ">= 1")};
  if (!std::isfinite(run_length) || run_length <= 0.0)
    return Unexpected{refusal("length of the run", run_length, "> 0")};
  if (!(w_max > 0.0)) return Unexpected{refusal("highest frequency of the sum", w_max, "> 0")};
  const auto poles = rational_poles(bath);
  if (!poles) return Unexpected{poles.error()};
  return pade_of(*poles, bath.theta(), count, sample_correlation(bath, run_length, w_max));
}

Result<ExponentialSum, BathError> fitted_sum(const ThermalBath& bath, int most, double run_length, double w_max) {
  if (most < 1) return Unexpected{refusal("number of terms", most, ">= 1")};
  if (const auto error = refusal_of(bath, run_length, w_max)) return Unexpected{*error};
  const CorrelationSamples samples = sample_correlation(bath, run_length, w_max);
  ExponentialSum best = finish({}, samples);
  if (is_no_bath(samples)) return best;
  CorrelationFit fit(bath, samples);
  for (int step = 0; step <= most && fit.grow(); ++step) {
    ExponentialSum next = fit.sum();
    if (std::ssize(next.terms) <= most && next.error < best.error) best = std::move(next);
  }
  return best;
}

Result<ExponentialSum, BathError> exponential_sum(const ThermalBath& bath, double tolerance, double run_length, double w_max) {
  if (!(tolerance > 0.0)) return Unexpected{refusal("tolerance of the sum", tolerance, "> 0")};
  if (const auto error = refusal_of(bath, run_length, w_max)) return Unexpected{*error};
  const CorrelationSamples samples = sample_correlation(bath, run_length, w_max);
  ExponentialSum best = finish({}, samples);
  if (is_no_bath(samples)) return best;
  // Shorter wins among the good ones, better among the others.
  const auto consider = [&](ExponentialSum next) {
    const bool good = next.error <= tolerance;
    const bool best_good = best.error <= tolerance;
    const bool shorter = next.terms.size() < best.terms.size();
    const bool better = next.error < best.error;
    const bool same_length = next.terms.size() == best.terms.size();
    if (good ? !best_good || shorter || (same_length && better) : !best_good && better) best = std::move(next);
    return good;
  };
  if (const auto poles = rational_poles(bath))
    for (int count = 1; count <= kMostTerms && !consider(pade_of(*poles, bath.theta(), count, samples)); ++count) {}
  CorrelationFit fit(bath, samples);
  for (int step = 0; step <= kMostTerms && fit.grow(); ++step)
    if (consider(fit.sum())) break;
  return best;
}

Complex correlation(const ExponentialSum& sum, double t) {
  Complex c = 0.0;
  for (const Exponential& term : sum.terms) c += term.coefficient * std::exp(-term.rate * t);
  return c;
}

Complex half_range(const ExponentialSum& sum, double w) {
  Complex total = sum.rest;
  for (const Exponential& term : sum.terms) total += term.coefficient / (term.rate - kImaginary * w);
  return total;
}

}  // namespace tarn::runtime
