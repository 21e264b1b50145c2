#include "runtime/equation/davies_table.h"

#include <algorithm>
#include <cmath>
#include <limits>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

struct Entry {
  Eigen::Index n, m;
  Complex value;
};

/// Elements of one coupling that belong to one frequency.
struct Jump {
  std::size_t first, last;  ///< Range of entries.
  double w;
};

struct Jumps {
  std::vector<Entry> entries;
  std::vector<Jump> jumps;
};

/// The jumps with an element above rounding, with their mean frequencies.
template <class Scalar>
Jumps collect(const Matrix<Scalar>& elements, const FrequencyGroups& groups, const Eigen::VectorXd& energies) {
  const Eigen::Index levels = elements.rows();
  const double negligible = 1e-13 * elements.cwiseAbs().maxCoeff();
  Jumps found;
  for (std::size_t g = 0; g < groups.count(); ++g) {
    Jump jump{found.entries.size(), 0, 0.0};
    for (std::uint32_t k = groups.start[g]; k < groups.start[g + 1]; ++k) {
      const auto pair = static_cast<Eigen::Index>(groups.order[k]);
      const Eigen::Index n = pair % levels, m = pair / levels;
      jump.w += energies[m] - energies[n];
      if (std::abs(elements(n, m)) > negligible) found.entries.push_back({n, m, elements(n, m)});
    }
    jump.w /= groups.start[g + 1] - groups.start[g];
    jump.last = found.entries.size();
    if (jump.last > jump.first) found.jumps.push_back(jump);
  }
  return found;
}

std::vector<double> evaluate(const SpectralFunction& function, const std::vector<Jump>& jumps) {
  std::vector<double> w, values(jumps.size());
  for (const Jump& jump : jumps) w.push_back(jump.w);
  if (function && !w.empty()) function(w, values.data());
  return values;
}

/// Sums up the map; pairs numbered a + K b until finish() numbers the coupled ones.
class Collector {
 public:
  explicit Collector(Eigen::Index levels)
      : levels_(levels),
        diagonal_(Eigen::MatrixXcd::Zero(levels, levels)),
        decay_(Eigen::MatrixXcd::Zero(levels, levels)),
        transfer_(Eigen::MatrixXd::Zero(levels, levels)) {}

  void add(const Jumps& found, const std::vector<double>& rate, const std::vector<double>& shift) {
    for (std::size_t g = 0; g < found.jumps.size(); ++g) {
      const Complex loss(0.5 * rate[g], shift[g]);
      for (std::size_t p = found.jumps[g].first; p < found.jumps[g].last; ++p)
        for (std::size_t q = found.jumps[g].first; q < found.jumps[g].last; ++q) {
          const Entry &x = found.entries[p], &y = found.entries[q];
          gain(x, y, rate[g]);
          if (x.n == y.n) decay_(x.m, y.m) += std::conj(x.value) * y.value * loss;
        }
    }
  }

  DaviesTable finish() {
    DaviesTable table;
    table.shift = decay_.diagonal().imag();
    table.shift.array() -= table.shift.mean();
    const Eigen::VectorXd rate = decay_.diagonal().real();
    table.loss = diagonal_;
    for (Eigen::Index b = 0; b < levels_; ++b)
      for (Eigen::Index a = 0; a < levels_; ++a) table.loss(a, b) -= rate[a] + rate[b];
    add_mixing();
    add_transfer();
    compress(table);
    return table;
  }

 private:
  std::uint32_t pair(Eigen::Index a, Eigen::Index b) const { return static_cast<std::uint32_t>(a + levels_ * b); }

  void gain(const Entry& x, const Entry& y, double rate) {
    const Complex value = rate * x.value * std::conj(y.value);
    if (x.n == x.m && y.n == y.m) {
      diagonal_(x.n, y.n) += value;
    } else if (x.n == y.n && x.m == y.m) {
      transfer_(x.n, x.m) += value.real();
    } else {
      terms_.push_back({pair(x.n, y.n), pair(x.m, y.m), value});
    }
  }

  /// -(D rho + rho D^dagger) for the elements of D between degenerate levels.
  void add_mixing() {
    for (Eigen::Index m = 0; m < levels_; ++m)
      for (Eigen::Index n = 0; n < levels_; ++n) {
        if (n == m || decay_(n, m) == 0.0) continue;
        for (Eigen::Index b = 0; b < levels_; ++b) {
          terms_.push_back({pair(n, b), pair(m, b), -decay_(n, m)});
          terms_.push_back({pair(b, n), pair(b, m), -std::conj(decay_(n, m))});
        }
      }
  }

  void add_transfer() {
    for (Eigen::Index m = 0; m < levels_; ++m)
      for (Eigen::Index n = 0; n < levels_; ++n)
        if (transfer_(n, m) != 0.0) terms_.push_back({pair(n, n), pair(m, m), transfer_(n, m)});
  }

  /// Merges equal terms and numbers the coupled pairs.
  void compress(DaviesTable& table) {
    std::sort(terms_.begin(), terms_.end(), [](const auto& x, const auto& y) {
      return x.target != y.target ? x.target < y.target : x.source < y.source;
    });
    std::vector<std::uint32_t> number(static_cast<std::size_t>(levels_ * levels_), 0);
    for (const auto& term : terms_) number[term.target] = number[term.source] = 1;
    for (std::uint32_t p = 0; p < number.size(); ++p) {
      if (number[p] == 0) continue;
      number[p] = static_cast<std::uint32_t>(table.coupled.size());
      table.coupled.push_back(p);
    }
    for (const auto& term : terms_) {
      const auto target = number[term.target], source = number[term.source];
      if (!table.terms.empty() && table.terms.back().target == target && table.terms.back().source == source) {
        table.terms.back().value += term.value;
      } else {
        table.terms.push_back({target, source, term.value});
      }
    }
    std::vector<double> sums;
    for (const auto p : table.coupled) sums.push_back(std::abs(table.loss.data()[p]));
    for (const auto& term : table.terms) sums[term.target] += std::abs(term.value);
    table.bound = sums.empty() ? 0.0 : *std::max_element(sums.begin(), sums.end());
  }

  Eigen::Index levels_;
  Eigen::MatrixXcd diagonal_;  ///< Gain of pair (a, b) from itself.
  Eigen::MatrixXcd decay_;     ///< sum A_w^dagger A_w (gamma/2 + i S).
  Eigen::MatrixXd transfer_;   ///< Population of m to n.
  std::vector<DaviesTable::Term> terms_;
};

/// gamma at the least energy that leaves the kept levels times what the coupling has outside.
template <class Scalar>
void add_outflow(const Frame<Scalar>& frame, const Matrix<Scalar>& image, const Matrix<Scalar>& elements,
                 const BathFunctions& bath, Eigen::VectorXd& outflow) {
  if (std::isinf(frame.next)) return;
  const Eigen::VectorXd outside = (image.cwiseAbs2().colwise().sum() - elements.cwiseAbs2().colwise().sum()).transpose().cwiseMax(0.0);
  std::vector<double> w, rate(static_cast<std::size_t>(frame.energies.size()));
  for (const double energy : frame.energies) w.push_back(energy - frame.next);
  bath.rate(w, rate.data());
  for (Eigen::Index a = 0; a < outflow.size(); ++a) outflow[a] += outside[a] * rate[static_cast<std::size_t>(a)];
}

}  // namespace

template <class Scalar>
DaviesTable davies_table(const LevelModel<Scalar>& model, const Frame<Scalar>& frame, const FrequencyGroups& groups,
                         std::span<const BathFunctions> baths) {
  TARN_CHECK(baths.size() == model.couplings);
  Collector collector(frame.energies.size());
  Eigen::VectorXd outflow = Eigen::VectorXd::Zero(frame.energies.size());
  for (std::size_t c = 0; c < baths.size(); ++c) {
    const Matrix<Scalar> image = model.coupling(c, frame.s, frame.vectors);
    const Matrix<Scalar> elements = frame.vectors.adjoint() * image;
    const Jumps found = collect<Scalar>(elements, groups, frame.energies);
    collector.add(found, evaluate(baths[c].rate, found.jumps), evaluate(baths[c].shift, found.jumps));
    add_outflow<Scalar>(frame, image, elements, baths[c], outflow);
  }
  DaviesTable table = collector.finish();
  table.outflow = outflow;
  return table;
}

void add_dissipator(const DaviesTable& table, const Eigen::MatrixXcd& rho, Eigen::MatrixXcd& out) {
  const Eigen::Index levels = rho.rows();
  for (Eigen::Index b = 0; b < levels; ++b)
    for (Eigen::Index a = 0; a < levels; ++a)
      out(a, b) += (table.loss(a, b) - Complex(0, table.shift[a] - table.shift[b])) * rho(a, b);
  for (const auto& term : table.terms)
    out.data()[table.coupled[term.target]] += term.value * rho.data()[table.coupled[term.source]];
}

void relax(const DaviesTable& table, double duration, Eigen::MatrixXcd& rho) {
  const std::size_t size = table.coupled.size();
  Eigen::VectorXcd state(static_cast<Eigen::Index>(size)), power, next;
  Eigen::VectorXcd diagonal(state.size());
  for (std::size_t p = 0; p < size; ++p) {
    state[static_cast<Eigen::Index>(p)] = rho.data()[table.coupled[p]];
    diagonal[static_cast<Eigen::Index>(p)] = table.loss.data()[table.coupled[p]];
  }
  for (Eigen::Index b = 0; b < rho.cols(); ++b)
    for (Eigen::Index a = 0; a <= b; ++a) {
      const Complex exponent = duration * table.loss(a, b);
      rho(a, b) *= exponent.imag() == 0.0 ? Complex(std::exp(exponent.real())) : std::exp(exponent);
      rho(b, a) = std::conj(rho(a, b));
    }
  const int pieces = std::max(1, static_cast<int>(std::ceil(duration * table.bound)));
  const double step = duration / pieces;
  for (int piece = 0; piece < pieces; ++piece) {
    power = state;
    for (int order = 1; order < 30; ++order) {
      next = diagonal.cwiseProduct(power);
      for (const auto& term : table.terms) next[term.target] += term.value * power[term.source];
      power = (step / order) * next;
      state += power;
      if (power.cwiseAbs().maxCoeff() < 1e-18) break;
    }
  }
  for (std::size_t p = 0; p < size; ++p) rho.data()[table.coupled[p]] = state[static_cast<Eigen::Index>(p)];
}

template DaviesTable davies_table<double>(const LevelModel<double>&, const Frame<double>&, const FrequencyGroups&, std::span<const BathFunctions>);
template DaviesTable davies_table<Complex>(const LevelModel<Complex>&, const Frame<Complex>&, const FrequencyGroups&, std::span<const BathFunctions>);

}  // namespace tarn::runtime
