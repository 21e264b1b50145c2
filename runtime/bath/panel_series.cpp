#include "runtime/bath/panel_series.h"

#include <algorithm>
#include <array>
#include <boost/math/quadrature/gauss.hpp>
#include <cmath>
#include <deque>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

constexpr std::size_t kTerms = 20;
constexpr std::size_t kTail = 3;  // terms whose size is the error estimate
constexpr int kDeepest = 60;
constexpr std::size_t kMostPieces = 500;  // of one panel between breaks
using Row = std::array<double, kTerms>;

/// Nodes on (-1, 1), and the matrix that takes values at the nodes to Legendre coefficients.
struct Rule {
  Row node;
  std::array<Row, kTerms> project;
};

Rule make_rule() {
  using Gauss = boost::math::quadrature::gauss<double, kTerms>;
  Rule rule{};
  Row weight{};
  for (std::size_t i = 0; i < kTerms / 2; ++i) {
    const double x = Gauss::abscissa()[i];
    rule.node[kTerms / 2 + i] = x;
    rule.node[kTerms / 2 - 1 - i] = -x;
    weight[kTerms / 2 + i] = weight[kTerms / 2 - 1 - i] = Gauss::weights()[i];
  }
  for (std::size_t i = 0; i < kTerms; ++i) {
    double before = 0.0;
    double p = 1.0;
    for (std::size_t n = 0; n < kTerms; ++n) {
      const auto degree = static_cast<double>(n);
      rule.project[n][i] = (degree + 0.5) * weight[i] * p;
      const double next = ((2.0 * degree + 1.0) * rule.node[i] * p - degree * before) / (degree + 1.0);
      before = p;
      p = next;
    }
  }
  return rule;
}

const Rule& rule() {
  static const Rule kRule = make_rule();
  return kRule;
}

double clenshaw(std::span<const double> a, double u) {
  double b1 = 0.0;
  double b2 = 0.0;
  for (std::size_t n = a.size(); n-- > 0;) {
    const auto degree = static_cast<double>(n);
    const double b0 = a[n] + (2.0 * degree + 1.0) / (degree + 1.0) * u * b1 - (degree + 1.0) / (degree + 2.0) * b2;
    b2 = b1;
    b1 = b0;
  }
  return b1;
}

/// Q_(n-1) = up[n] u Q_n - down[n] Q_(n+1): the recurrence without its divisions.
struct Recurrence {
  static constexpr std::size_t kSize = 256;
  std::array<double, kSize> up{};
  std::array<double, kSize> down{};
};

constexpr Recurrence make_recurrence() {
  Recurrence r;
  for (std::size_t n = 1; n < Recurrence::kSize; ++n) {
    const auto degree = static_cast<double>(n);
    r.up[n] = (2.0 * degree + 1.0) / degree;
    r.down[n] = (degree + 1.0) / degree;
  }
  return r;
}
constexpr Recurrence kRecurrence = make_recurrence();

/// Sum of a_n Q_n(u), given q0 = Q_0(u) = log|(u+1)/(u-1)|/2.
double sum_second_kind(std::span<const double> a, double u, double q0) {
  const double size = std::abs(u);
  const double growth = size <= 1.0 ? 0.0 : std::log(size + std::sqrt(size * size - 1.0));
  const auto count = static_cast<double>(a.size());
  if (2.0 * growth * count < 4.0) {
    double sum = 0.0;
    double before = 0.0;
    double q = q0;
    for (std::size_t n = 0; n < a.size(); ++n) {
      sum += a[n] * q;
      const auto degree = static_cast<double>(n);
      const double next = n == 0 ? u * q - 1.0 : ((2.0 * degree + 1.0) * u * q - degree * before) / (degree + 1.0);
      before = q;
      q = next;
    }
    return sum;
  }
  // Upward recurrence is unstable out here; downward from far enough, scaled by Q_0.
  constexpr double kDigits = 38.0;
  const auto start = std::min(a.size() + static_cast<std::size_t>(kDigits / (2.0 * growth)) + 2, Recurrence::kSize - 1);
  double above = 0.0;
  double q = 1e-280;
  double sum = 0.0;
  for (std::size_t n = start; n-- > 0;) {
    const double below = kRecurrence.up[n + 1] * u * q - kRecurrence.down[n + 1] * above;
    above = q;
    q = below;
    if (n < a.size()) sum += a[n] * q;
    if (std::abs(q) > 1e200) {
      above *= 1e-250;
      q *= 1e-250;
      sum *= 1e-250;
    }
  }
  return sum / q * q0;
}

/// The logarithm of the distance to a panel's edge. Met from the two panels of an edge it is
/// the same number, and cancels where f is continuous; at the edge itself both are dropped.
double edge_log(double distance) { return distance == 0.0 ? 0.0 : std::log(std::abs(distance)); }

/// Spherical Bessel functions j_0 .. j_(count-1) at k.
Row spherical_bessel(double k, std::size_t count) {
  Row j{};
  const double size = std::abs(k);
  if (size < 1e-8) {
    j[0] = 1.0;
    j[1] = k / 3.0;
    return j;
  }
  const double j0 = std::sin(k) / k;
  if (size > static_cast<double>(count)) {
    j[0] = j0;
    j[1] = (j0 - std::cos(k)) / k;
    for (std::size_t n = 1; n + 1 < count; ++n)
      j[n + 1] = (2.0 * static_cast<double>(n) + 1.0) / k * j[n] - j[n - 1];
    return j;
  }
  double above = 0.0;
  double here = 1e-250;
  Row value{};
  for (std::size_t n = count + 30; n-- > 0;) {
    const double degree = static_cast<double>(n);
    const double below = (2.0 * degree + 3.0) / k * here - above;
    above = here;
    here = below;
    if (n < kTerms) value[n] = here;
    if (std::abs(here) > 1e100) {
      above *= 1e-150;
      here *= 1e-150;
      for (double& v : value) v *= 1e-150;
    }
  }
  const double j1 = (j0 - std::cos(k)) / k;
  const bool by_j0 = std::abs(value[0]) >= std::abs(value[1]);
  const double scale = by_j0 ? j0 / value[0] : j1 / value[1];
  for (std::size_t n = 0; n < kTerms; ++n) j[n] = value[n] * scale;
  return j;
}

}  // namespace

class PanelBuilder {
 public:
  PanelBuilder(const BatchFunction& f, PanelTolerance tolerance) : f_(f), tolerance_(tolerance) {}

  /// Adds panels for [left, right], in order of their left ends. Breadth first, so that
  /// where f is too noisy for the tolerance the panels end up equally fine.
  void add(double left, double right, PanelSeries& out) {
    struct Piece {
      double left;
      double right;
      int depth;
    };
    std::deque<Piece> pending = {{left, right, 0}};
    const std::size_t first = out.panels_.size();
    for (std::size_t seen = 0; !pending.empty(); ++seen) {
      const Piece piece = pending.front();
      pending.pop_front();
      const bool last = piece.depth == kDeepest || seen >= kMostPieces;
      if (settle(piece.left, piece.right, last, out)) continue;
      const double centre = 0.5 * (piece.left + piece.right);
      pending.push_back({piece.left, centre, piece.depth + 1});
      pending.push_back({centre, piece.right, piece.depth + 1});
    }
    const auto by_left = [](const PanelSeries::Panel& p, const PanelSeries::Panel& q) { return p.left < q.left; };
    std::sort(out.panels_.begin() + static_cast<std::ptrdiff_t>(first), out.panels_.end(), by_left);
  }

 private:
  struct Projection {
    Row coefficient{};
    double largest = 0.0;  ///< |f| at the nodes.
  };

  /// Appends [left, right] as one panel if it is good enough, or `last`; else false.
  bool settle(double left, double right, bool last, PanelSeries& out) const {
    const double half = 0.5 * (right - left);
    const double centre = 0.5 * (left + right);
    const auto [a, largest] = project(centre, half);
    out.evaluations_ += kTerms;
    double tail = 0.0;
    for (std::size_t n = kTerms - kTail; n < kTerms; ++n) tail = std::max(tail, std::abs(a[n]));
    const double allowed = std::max(tolerance_.relative * largest, tolerance_.absolute);
    if (tail > allowed && !last && half >= 1e-13 * std::abs(centre)) return false;
    std::size_t count = kTerms;
    while (count > 1 && std::abs(a[count - 1]) < 0.01 * allowed) --count;
    out.panels_.push_back({left, right, out.coefficients_.size(), count});
    for (std::size_t n = 0; n < count; ++n) out.coefficients_.push_back(a[n]);
    out.error_ = std::max(out.error_, tail);
    out.integral_error_ += 2.0 * half * tail;
    return true;
  }

  Projection project(double centre, double half) const {
    Row x{};
    Row y{};
    for (std::size_t i = 0; i < kTerms; ++i) x[i] = centre + half * rule().node[i];
    f_(x, y.data());
    Projection p;
    for (std::size_t i = 0; i < kTerms; ++i) {
      p.largest = std::max(p.largest, std::abs(y[i]));
      for (std::size_t n = 0; n < kTerms; ++n) p.coefficient[n] += rule().project[n][i] * y[i];
    }
    return p;
  }

  const BatchFunction& f_;
  PanelTolerance tolerance_;
};

PanelSeries PanelSeries::expand(const BatchFunction& f, std::span<const double> breaks, PanelTolerance tolerance) {
  TARN_CHECK(breaks.size() >= 2);
  TARN_CHECK(std::is_sorted(breaks.begin(), breaks.end()));
  PanelSeries out;
  PanelBuilder builder(f, tolerance);
  for (std::size_t i = 0; i + 1 < breaks.size(); ++i) builder.add(breaks[i], breaks[i + 1], out);
  return out;
}

double PanelSeries::value(double x) const {
  if (panels_.empty() || x < panels_.front().left || x > panels_.back().right) return 0.0;
  const auto ends_after = [](double w, const Panel& p) { return w < p.right; };
  auto panel = std::upper_bound(panels_.begin(), panels_.end(), x, ends_after);
  if (panel == panels_.end()) --panel;
  const double u = ((x - panel->left) - (panel->right - x)) / (panel->right - panel->left);
  return clenshaw(std::span(coefficients_).subspan(panel->first, panel->count), u);
}

double PanelSeries::cauchy(double x) const {
  double sum = 0.0;
  for (const Panel& panel : panels_) {
    const double width = panel.right - panel.left;
    // Differences to the edges first: next to a narrow panel far from 0 they are exact.
    const double from_left = x - panel.left;
    const double from_right = x - panel.right;
    const double u = (from_left + from_right) / width;
    const bool near = std::abs(u) < 8.0;
    const double q0 = near ? 0.5 * (edge_log(from_left) - edge_log(from_right)) : 0.5 * std::log1p(2.0 / (u - 1.0));
    sum += 2.0 * sum_second_kind(std::span(coefficients_).subspan(panel.first, panel.count), u, q0);
  }
  return sum;
}

std::complex<double> PanelSeries::fourier(double t) const {
  static constexpr std::array<std::complex<double>, 4> kPowers = {{{1, 0}, {0, -1}, {-1, 0}, {0, 1}}};
  std::complex<double> sum = 0.0;
  for (const Panel& panel : panels_) {
    const double half = 0.5 * (panel.right - panel.left);
    const Row j = spherical_bessel(t * half, panel.count);
    std::complex<double> local = 0.0;
    for (std::size_t n = 0; n < panel.count; ++n) local += kPowers[n % 4] * (coefficients_[panel.first + n] * j[n]);
    const double phase = t * 0.5 * (panel.left + panel.right);
    sum += 2.0 * half * std::complex<double>(std::cos(phase), -std::sin(phase)) * local;
  }
  return sum;
}

PanelSeries PanelSeries::until(double x) const {
  PanelSeries out = *this;
  while (!out.panels_.empty() && out.panels_.back().left >= x) out.panels_.pop_back();
  if (out.panels_.empty() || out.panels_.back().right <= x) return out;
  // A polynomial on part of its panel is a polynomial of the same degree.
  Panel& last = out.panels_.back();
  out.coefficients_.resize(last.first);
  const double half = 0.5 * (x - last.left);
  Row value{};
  for (std::size_t i = 0; i < kTerms; ++i) value[i] = this->value(last.left + half * (1.0 + rule().node[i]));
  for (std::size_t n = 0; n < last.count; ++n) {
    double sum = 0.0;
    for (std::size_t i = 0; i < kTerms; ++i) sum += rule().project[n][i] * value[i];
    out.coefficients_.push_back(sum);
  }
  last.right = x;
  return out;
}

std::vector<double> PanelSeries::edges() const {
  std::vector<double> all;
  for (const Panel& panel : panels_) all.push_back(panel.left);
  if (!panels_.empty()) all.push_back(panels_.back().right);
  return all;
}

double PanelSeries::integral() const {
  double sum = 0.0;
  for (const Panel& panel : panels_) sum += (panel.right - panel.left) * coefficients_[panel.first];
  return sum;
}

}  // namespace tarn::runtime
