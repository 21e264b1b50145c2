#include "runtime/bath/spectral_density.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

namespace tarn::runtime {
namespace {

using Eigen::ArrayXd;
using Eigen::Index;
using ArrayRef = Eigen::Ref<const ArrayXd>;

template <class... F>
struct Overloaded : F... {
  using F::operator()...;
};

constexpr double kInfinity = std::numeric_limits<double>::infinity();
/// The scan of an unknown J: this many points an octave, from 2^-60 to 2^50 rad/ns.
constexpr int kScanPerOctave = 8;
constexpr int kScanFirst = -60 * kScanPerOctave;
constexpr int kScanLast = 50 * kScanPerOctave;
constexpr double kNegligible = 1e-18;
/// The frequency [rad/ns] at which the slope J/w at zero is read off a Sampled J.
constexpr double kZeroProbe = 1e-15;

/// The law of the segment that starts at row i, at any w > 0.
double segment_value(const Tabulated& table, std::size_t i, double w) {
  if (table.interpolation == Interpolation::log_log) {
    const double x = std::log(w / table.w[i]) / std::log(table.w[i + 1] / table.w[i]);
    return table.j[i] * std::exp(x * std::log(table.j[i + 1] / table.j[i]));
  }
  const double x = (w - table.w[i]) / (table.w[i + 1] - table.w[i]);
  return (1.0 - x) * table.j[i] + x * table.j[i + 1];
}

double table_value(const Tabulated& table, double w) {
  if (w < table.w.front() || w > table.w.back()) return 0.0;
  const auto upper = std::upper_bound(table.w.begin(), table.w.end(), w);
  const auto row = std::min<std::ptrdiff_t>(upper - table.w.begin(), std::ssize(table.w) - 1) - 1;
  return segment_value(table, static_cast<std::size_t>(row), w);
}

double table_slope_at_zero(const Tabulated& table) {
  if (table.w.front() > 0.0) return 0.0;
  return table.j.front() == 0.0 ? table.j[1] / table.w[1] : kInfinity;
}

double sampled_value(const Sampled& sampled, double w) {
  if (w < sampled.low || w > sampled.high || w <= 0.0) return 0.0;
  double j = 0.0;
  sampled.evaluate(std::span(&w, 1), &j);
  return j;
}

double sampled_slope_at_zero(const Sampled& sampled) {
  if (sampled.low > 0.0) return 0.0;
  constexpr double kStep = 16.0;
  constexpr double kSame = 1e-3;
  const double outer = sampled_value(sampled, kZeroProbe) / kZeroProbe;
  const double inner = sampled_value(sampled, kZeroProbe / kStep) / (kZeroProbe / kStep);
  if (std::abs(inner - outer) <= kSame * std::abs(outer)) return inner;
  return inner < outer ? 0.0 : kInfinity;
}

ArrayXd sampled_values(const Sampled& sampled, const ArrayRef& w) {
  std::vector<double> inside;
  for (const double x : w)
    if (x > 0.0 && x >= sampled.low && x <= sampled.high) inside.push_back(x);
  std::vector<double> values(inside.size());
  if (!inside.empty()) sampled.evaluate(inside, values.data());
  ArrayXd j = ArrayXd::Zero(w.size());
  std::size_t next = 0;
  for (Index i = 0; i < w.size(); ++i)
    if (w[i] > 0.0 && w[i] >= sampled.low && w[i] <= sampled.high) j[i] = values[next++];
  return j;
}

double power_law_over_w(const PowerLaw& law, double w) {
  if (law.eta == 0.0) return 0.0;
  if (law.s == 1.0) return law.eta * std::exp(-w / law.cutoff);
  return law.eta * std::pow(w / law.cutoff, law.s - 1.0) * std::exp(-w / law.cutoff);
}

double peak_over_w(const LorentzianPeak& peak, double w) {
  const double detuning = (w - peak.centre) * (w + peak.centre);
  const double damping = peak.width * w;
  return 2.0 / M_PI * peak.strength * peak.centre * peak.centre * peak.width /
         (detuning * detuning + damping * damping);
}

/// J at the points of the scan that lie inside [low, high].
struct Scan {
  ArrayXd w;
  ArrayXd j;
};

Scan scan(const Sampled& sampled) {
  std::vector<double> points;
  const auto add = [&](double w) {
    if (w > 0.0 && w >= sampled.low && w <= sampled.high && std::isfinite(w)) points.push_back(w);
  };
  for (int k = kScanFirst; k <= kScanLast; ++k) add(std::exp2(static_cast<double>(k) / kScanPerOctave));
  for (const double w : sampled.breaks) add(w);
  add(sampled.low);
  add(sampled.high);
  std::sort(points.begin(), points.end());
  const ArrayXd w = Eigen::Map<const ArrayXd>(points.data(), std::ssize(points));
  return {w, sampled_values(sampled, w)};
}

Support sampled_support(const Sampled& sampled) {
  const Scan s = scan(sampled);
  if (s.w.size() == 0) return {sampled.low, sampled.low, 1.0};
  const double largest = s.j.maxCoeff();
  Index last = s.w.size() - 1;
  while (last > 0 && s.j[last] <= kNegligible * largest) --last;
  Index scale = 0;
  (s.w * s.j).maxCoeff(&scale);
  // A slow algebraic tail has no largest w J: what matters there is where J itself peaks.
  if (scale + kScanPerOctave >= s.w.size()) s.j.maxCoeff(&scale);
  const Index beyond = std::min(last + kScanPerOctave, s.w.size() - 1);
  return {sampled.low, s.w[beyond], s.w[scale]};
}

using Fault = std::optional<BathError>;

Fault range_fault(std::size_t row, std::string_view name, double value, bool inside, std::string_view range) {
  if (std::isfinite(value) && inside) return std::nullopt;
  return BathError{BathErrorCode::out_of_range, row, name, value, range};
}

Fault positive(std::size_t row, std::string_view name, double value) {
  return range_fault(row, name, value, value > 0.0, "> 0");
}

Fault not_negative(std::size_t row, std::string_view name, double value) {
  return range_fault(row, name, value, value >= 0.0, ">= 0");
}

Fault table_fault(std::size_t row, const Tabulated& table) {
  const auto bad = [row](std::string_view name, double value, std::string_view range) {
    return BathError{BathErrorCode::bad_table, row, name, value, range};
  };
  if (table.w.size() < 2) return bad("rows", static_cast<double>(table.w.size()), ">= 2");
  if (table.w.size() != table.j.size())
    return bad("rows of j", static_cast<double>(table.j.size()), "as many as rows of w");
  const bool logarithmic = table.interpolation == Interpolation::log_log;
  const std::string_view range = logarithmic ? "> 0" : ">= 0";
  const auto outside = [logarithmic](double x) { return !std::isfinite(x) || (logarithmic ? x <= 0.0 : x < 0.0); };
  for (std::size_t i = 0; i < table.w.size(); ++i) {
    const double w = table.w[i];
    const double j = table.j[i];
    if (outside(w)) return bad("w", w, range);
    if (i > 0 && w <= table.w[i - 1]) return bad("w", w, "strictly ascending");
    if (w == 0.0 && j != 0.0) return bad("j at w = 0", j, "0 (or start the table above w = 0)");
    if (outside(j)) return bad("j", j, range);
  }
  return std::nullopt;
}

Fault sampled_fault(std::size_t row, const Sampled& sampled) {
  if (auto fault = not_negative(row, "low", sampled.low)) return fault;
  if (!(sampled.high > sampled.low))
    return BathError{BathErrorCode::out_of_range, row, "high", sampled.high, "> low"};
  const Scan s = scan(sampled);
  for (Index i = 0; i < s.w.size(); ++i)
    if (!(s.j[i] >= 0.0) || !std::isfinite(s.j[i]))
      return BathError{BathErrorCode::negative_density, row, "j", s.w[i], "J(w) finite and >= 0"};
  // J that does not vanish at w = 0 (1/f noise) has an infinite reorganisation energy.
  constexpr double kSmallestExponent = 0.01;
  const double outer = sampled_value(sampled, kZeroProbe);
  const double inner = sampled_value(sampled, kZeroProbe / 16.0);
  if (inner > 0.0 && outer <= inner * std::pow(16.0, kSmallestExponent))
    return BathError{BathErrorCode::zero_rate_diverges, row, "j near w = 0", inner, ""};
  return std::nullopt;
}

Fault component_fault(std::size_t row, const Component& component) {
  return std::visit(
      Overloaded{
          [row](const PowerLaw& c) {
            if (auto fault = not_negative(row, "eta", c.eta)) return fault;
            if (auto fault = positive(row, "cutoff", c.cutoff)) return fault;
            return range_fault(row, "s", c.s, c.s > 0.0 && c.s <= 8.0, "> 0 and <= 8");
          },
          [row](const Drude& c) {
            if (auto fault = not_negative(row, "eta", c.eta)) return fault;
            return positive(row, "cutoff", c.cutoff);
          },
          [row](const LorentzianPeak& c) {
            if (auto fault = not_negative(row, "strength", c.strength)) return fault;
            if (auto fault = positive(row, "centre", c.centre)) return fault;
            return positive(row, "width", c.width);
          },
          [row](const Tabulated& c) { return table_fault(row, c); },
          [row](const Sampled& c) { return sampled_fault(row, c); },
      },
      component);
}

}  // namespace

std::string to_text(const BathError& e) {
  const std::size_t part = e.component + 1;
  switch (e.code) {
    case BathErrorCode::out_of_range:
      return fmt::format("`{}` of part {} of the bath is {:g}; give a value {}", e.parameter, part, e.value, e.range);
    case BathErrorCode::bad_table:
      return fmt::format("the table of part {} of the bath has {} = {:g}; it must be {}", part, e.parameter, e.value,
                         e.range);
    case BathErrorCode::negative_density:
      return fmt::format("the density of part {} of the bath is negative or not a number at {:g} rad/ns; limit its band "
                         "or correct it", part, e.value);
    case BathErrorCode::zero_rate_diverges:
      return fmt::format("part {} of the bath has an infinite rate at zero frequency ({} = {:g}); use slow-noise rates, "
                         "or a band with a low end above zero", part, e.parameter, e.value);
    case BathErrorCode::times_diverge:
      return fmt::format("the correlation function of part {} of the bath falls too slowly for a correlation time; "
                         "smooth the edge of its band, or use slow-noise rates", part);
  }
  return {};
}

std::optional<BathError> find_fault(const SpectralDensity& density) {
  for (std::size_t row = 0; row < density.size(); ++row)
    if (auto fault = component_fault(row, density[row])) return fault;
  return std::nullopt;
}

ArrayXd density_over_w(const Component& component, const ArrayRef& w) {
  const auto each = [&w](auto&& function) -> ArrayXd { return w.unaryExpr(function); };
  return std::visit(
      Overloaded{
          [&](const PowerLaw& c) { return each([&](double x) { return power_law_over_w(c, x); }); },
          [&](const Drude& c) -> ArrayXd { return c.eta / (1.0 + (w / c.cutoff).square()); },
          [&](const LorentzianPeak& c) { return each([&](double x) { return peak_over_w(c, x); }); },
          [&](const Tabulated& c) {
            const double zero = table_slope_at_zero(c);
            return each([&](double x) { return x == 0.0 ? zero : table_value(c, x) / x; });
          },
          [&](const Sampled& c) -> ArrayXd {
            const double zero = (w == 0.0).any() ? sampled_slope_at_zero(c) : 0.0;
            return (w == 0.0).select(zero, sampled_values(c, w) / w);
          },
      },
      component);
}

double density_step(const Tabulated& table, std::size_t row, double w) {
  const double right = row + 1 < table.w.size() ? segment_value(table, row, w) : 0.0;
  const double left = row > 0 ? segment_value(table, row - 1, w) : 0.0;
  return right - left;
}

ArrayXd spectral_density(const Component& component, const ArrayRef& w) {
  const ArrayXd j = w * density_over_w(component, w.abs());
  return (w == 0.0).select(0.0, j);
}

Support support(const Component& component) {
  return std::visit(Overloaded{
                        [](const PowerLaw& c) {
                          const double scale = c.cutoff * (1.0 + c.s);
                          return Support{0.0, 60.0 * scale, scale};
                        },
                        [](const Drude& c) { return Support{0.0, kInfinity, c.cutoff}; },
                        [](const LorentzianPeak& c) { return Support{0.0, kInfinity, c.centre + c.width}; },
                        [](const Tabulated& c) { return Support{c.w.front(), c.w.back(), c.w.back()}; },
                        [](const Sampled& c) { return sampled_support(c); },
                    },
                    component);
}

}  // namespace tarn::runtime
