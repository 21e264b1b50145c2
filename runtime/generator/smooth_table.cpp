#include "runtime/generator/smooth_table.h"

#include <algorithm>
#include <cmath>
#include <cstring>
#include <numbers>

#include "lang/support/check.h"
#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

/// Reading a table costs a pass over its nodes: large ones take shorter panels of lower degree.
constexpr std::size_t kLarge = 100000;
constexpr std::size_t kNodes = 8, kNodesOfLarge = 4;
constexpr double kNarrowest = 1e-9;

/// out = sum_k share[k] values[k size + i], i < count, four nodes at a time.
TARN_HOST_CLONES
void weigh(const double* values, std::size_t size, std::size_t count, std::size_t nodes, const double* share, double* out) {
  for (std::size_t k = 0; k + 3 < nodes; k += 4) {
    const double *a = values + k * size, *b = a + size, *c = b + size, *d = c + size;
    const double p = share[k], q = share[k + 1], r = share[k + 2], t = share[k + 3];
    std::size_t i = 0;
    for (; i + kPackWidth <= count; i += kPackWidth) {
      Pack v, w, x, y, sum = {};
      std::memcpy(&v, a + i, sizeof v);
      std::memcpy(&w, b + i, sizeof w);
      std::memcpy(&x, c + i, sizeof x);
      std::memcpy(&y, d + i, sizeof y);
      if (k > 0) std::memcpy(&sum, out + i, sizeof sum);
      sum += v * p + w * q + x * r + y * t;
      std::memcpy(out + i, &sum, sizeof sum);
    }
    for (; i < count; ++i) out[i] = (k > 0 ? out[i] : 0.0) + p * a[i] + q * b[i] + r * c[i] + t * d[i];
  }
}

}  // namespace

struct SmoothTable::Builder {
  const Function& function;
  const Options& options;
  SmoothTable& table;
  double largest = 0;
  std::vector<double> exact, read;

  struct Panel {
    double left, right;
    std::vector<double> values;
  };
  std::vector<Panel> done;

  bool stopped() const { return options.interrupted && options.interrupted(); }

  void evaluate(double s, double* out) {
    function(s, out);
    ++table.evaluations_;
    for (std::size_t i = 0; i < table.size_; ++i) largest = std::max(largest, std::abs(out[i]));
  }

  Panel make_panel(double left, double right) {
    Panel panel{left, right, std::vector<double>(table.nodes_ * table.size_)};
    for (std::size_t k = 0; k < table.nodes_; ++k) {
      evaluate(left + 0.5 * (right - left) * (1 + table.points_[k]), panel.values.data() + k * table.size_);
    }
    return panel;
  }

  /// Where the polynomial is worst: between the last node and either end.
  double misfit(const Panel& panel) {
    double worst = 0;
    for (const double x : {-0.999, 0.999}) {
      const double s = panel.left + 0.5 * (panel.right - panel.left) * (1 + x);
      evaluate(s, exact.data());
      table.combine(panel.values.data(), x, table.size_, read.data());
      for (std::size_t i = 0; i < table.size_; ++i) {
        const double off = std::abs(exact[i] - read[i]);
        // NaN stays the worst.
        if (!(off <= worst)) worst = off;
      }
    }
    return worst;
  }

  /// False if interrupted.
  bool refine(Panel panel) {
    if (stopped()) return false;
    const double off = misfit(panel);
    const bool good = off <= options.tolerance * largest;
    const bool narrow = panel.right - panel.left < kNarrowest;
    const bool full = options.most_values > 0 && (done.size() + 2) * table.nodes_ * table.size_ > options.most_values;
    if (good || narrow || full) {
      table.error_ = std::max(table.error_, off);
      table.resolved_ = table.resolved_ && good;
      done.push_back(std::move(panel));
      return true;
    }
    const double left = panel.left, right = panel.right, middle = 0.5 * (left + right);
    panel.values = {};
    return refine(make_panel(left, middle)) && refine(make_panel(middle, right));
  }
};

void SmoothTable::combine(const double* values, double x, std::size_t count, double* out) const {
  double sum = 0;
  double share[kNodes];
  for (std::size_t k = 0; k < nodes_; ++k) {
    const double distance = x - points_[k];
    if (distance == 0) {
      std::copy_n(values + k * size_, count, out);
      return;
    }
    sum += share[k] = weights_[k] / distance;
  }
  for (std::size_t k = 0; k < nodes_; ++k) share[k] /= sum;
  weigh(values, size_, count, nodes_, share, out);
}

std::optional<SmoothTable> SmoothTable::make(const Function& function, const Options& options) {
  TARN_CHECK(options.breaks.size() >= 2 && options.size > 0);
  SmoothTable table;
  table.size_ = options.size;
  table.nodes_ = options.size > kLarge ? kNodesOfLarge : kNodes;
  for (std::size_t k = 0; k < table.nodes_; ++k) {
    const double angle = std::numbers::pi * (static_cast<double>(k) + 0.5) / static_cast<double>(table.nodes_);
    table.points_.push_back(-std::cos(angle));
    table.weights_.push_back((k % 2 == 0 ? 1 : -1) * std::sin(angle));
  }
  Builder builder{function, options, table, 0, std::vector<double>(options.size), std::vector<double>(options.size), {}};
  std::vector<Builder::Panel> first;
  for (std::size_t b = 0; b + 1 < options.breaks.size(); ++b) {
    if (builder.stopped()) return std::nullopt;
    first.push_back(builder.make_panel(options.breaks[b], options.breaks[b + 1]));
  }
  for (Builder::Panel& panel : first) {
    if (!builder.refine(std::move(panel))) return std::nullopt;
  }
  for (Builder::Panel& panel : builder.done) {
    table.lefts_.push_back(panel.left);
    table.rights_.push_back(panel.right);
    table.values_.push_back(std::move(panel.values));
  }
  return table;
}

void SmoothTable::first(double s, std::size_t count, double* out) const {
  // A value held at an end would look like an answer.
  const double slack = 1e-6 * (rights_.back() - lefts_.front());
  TARN_CHECK(s >= lefts_.front() - slack && s <= rights_.back() + slack);
  const auto after = std::upper_bound(lefts_.begin(), lefts_.end(), s);
  const std::size_t panel = after == lefts_.begin() ? 0 : static_cast<std::size_t>(after - lefts_.begin()) - 1;
  const double left = lefts_[panel], right = rights_[panel];
  const double x = std::clamp(2 * (s - left) / (right - left) - 1, -1.0, 1.0);
  combine(values_[panel].data(), x, count, out);
}

}  // namespace tarn::runtime
