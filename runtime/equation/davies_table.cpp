#include "runtime/equation/davies_table.h"

#include <algorithm>
#include <cmath>
#include <limits>

#include "lang/support/check.h"
#include "runtime/levels/product.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// Rates and shifts of all couplings, [coupling][group]; groups no coupling uses stay 0.
struct Spectra {
  std::vector<std::vector<double>> rate, shift;
};

/// Pairs of each group in which some coupling has an element above rounding.
struct Jump {
  std::vector<std::uint32_t> pairs;
  double w = 0;  ///< Mean frequency of the group.
};

template <class Scalar>
std::vector<Jump> collect(const std::vector<Matrix<Scalar>>& elements, const FrequencyGroups& groups, const Eigen::VectorXd& energies) {
  const Eigen::Index levels = energies.size();
  Eigen::MatrixXd size = Eigen::MatrixXd::Zero(levels, levels);
  for (const auto& one : elements) size = size.cwiseMax(one.cwiseAbs());
  const double negligible = 1e-13 * size.maxCoeff();
  std::vector<Jump> found;
  for (std::size_t g = 0; g < groups.count(); ++g) {
    Jump jump;
    for (std::uint32_t k = groups.start[g]; k < groups.start[g + 1]; ++k) {
      const std::uint32_t pair = groups.order[k];
      jump.w += energies[pair / levels] - energies[pair % levels];
      if (size.data()[pair] > negligible) jump.pairs.push_back(pair);
    }
    jump.w /= groups.start[g + 1] - groups.start[g];
    if (!jump.pairs.empty()) found.push_back(std::move(jump));
  }
  return found;
}

Spectra evaluate(std::span<const BathFunctions> baths, const std::vector<Jump>& jumps) {
  std::vector<double> w;
  for (const Jump& jump : jumps) w.push_back(jump.w);
  Spectra spectra;
  for (std::size_t c = 0; c < baths.size(); ++c) {
    const auto twin = std::find_if(baths.begin(), baths.begin() + static_cast<std::ptrdiff_t>(c),
                                   [&](const BathFunctions& other) { return other.alike >= 0 && other.alike == baths[c].alike; });
    if (const auto before = static_cast<std::size_t>(twin - baths.begin()); before < c) {
      spectra.rate.push_back(spectra.rate[before]);
      spectra.shift.push_back(spectra.shift[before]);
      continue;
    }
    spectra.rate.emplace_back(w.size(), 0.0);
    spectra.shift.emplace_back(w.size(), 0.0);
    if (w.empty()) continue;
    baths[c].rate(w, spectra.rate.back().data());
    if (baths[c].shift) baths[c].shift(w, spectra.shift.back().data());
  }
  return spectra;
}

/// Sums up the map; pairs numbered a + K b until finish() numbers the coupled ones.
class Collector {
 public:
  explicit Collector(Eigen::Index levels)
      : levels_(levels),
        diagonal_(Eigen::MatrixXcd::Zero(levels, levels)),
        decay_(Eigen::MatrixXcd::Zero(levels, levels)),
        transfer_(Eigen::MatrixXd::Zero(levels, levels)) {}

  template <class Scalar>
  void add(const std::vector<Matrix<Scalar>>& elements, const std::vector<Jump>& jumps, const Spectra& spectra) {
    for (std::size_t g = 0; g < jumps.size(); ++g)
      for (const std::uint32_t p : jumps[g].pairs)
        for (const std::uint32_t q : jumps[g].pairs) {
          Complex gained = 0, lost = 0;
          for (std::size_t c = 0; c < elements.size(); ++c) {
            const Complex x = elements[c].data()[p], y = elements[c].data()[q];
            gained += spectra.rate[c][g] * x * std::conj(y);
            lost += Complex(0.5 * spectra.rate[c][g], spectra.shift[c][g]) * std::conj(x) * y;
          }
          const Eigen::Index n = p % levels_, m = p / levels_, k = q % levels_, l = q / levels_;
          gain(n, m, k, l, gained);
          if (n == k) decay_(m, l) += lost;
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

  /// rho_ml feeds rho_nk.
  void gain(Eigen::Index n, Eigen::Index m, Eigen::Index k, Eigen::Index l, Complex value) {
    if (n == m && k == l) {
      diagonal_(n, k) += value;
    } else if (n == k && m == l) {
      transfer_(n, m) += value.real();
    } else if (value != 0.0) {
      terms_.push_back({pair(n, k), pair(m, l), value});
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
  Eigen::VectorXd outflow = Eigen::VectorXd::Zero(frame.energies.size());
  std::vector<Matrix<Scalar>> elements;
  for (std::size_t c = 0; c < baths.size(); ++c) {
    const Matrix<Scalar> image = model.coupling(c, frame.s, frame.vectors);
    elements.push_back(product<Scalar>(frame.vectors.adjoint(), image));
    add_outflow<Scalar>(frame, image, elements.back(), baths[c], outflow);
  }
  Collector collector(frame.energies.size());
  const std::vector<Jump> jumps = collect<Scalar>(elements, groups, frame.energies);
  collector.add<Scalar>(elements, jumps, evaluate(baths, jumps));
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
  if (size == 0) return;
  const int pieces = std::max(1, static_cast<int>(std::ceil(duration * table.bound)));
  const double step = duration / pieces;
  for (int piece = 0; piece < pieces; ++piece) {
    power = state;
    for (int order = 1; order < 30; ++order) {
      next = diagonal.cwiseProduct(power);
      for (const auto& term : table.terms) next[term.target] += term.value * power[term.source];
      power = (step / order) * next;
      state += power;
      if (power.cwiseAbs2().maxCoeff() < 1e-36) break;
    }
  }
  for (std::size_t p = 0; p < size; ++p) rho.data()[table.coupled[p]] = state[static_cast<Eigen::Index>(p)];
}

template DaviesTable davies_table<double>(const LevelModel<double>&, const Frame<double>&, const FrequencyGroups&, std::span<const BathFunctions>);
template DaviesTable davies_table<Complex>(const LevelModel<Complex>&, const Frame<Complex>&, const FrequencyGroups&, std::span<const BathFunctions>);

}  // namespace tarn::runtime
