#include "runtime/equation/davies_step.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numeric>
#include <type_traits>

#include "runtime/integrate/dense_exponential.h"
#include "runtime/levels/product.h"
#include "runtime/levels/rotation.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// Half a step as the state meets it. `variation` is the change of the rotation's elements from
/// its start to its end; empty if not known.
template <class Scalar>
struct Half {
  const Link<Scalar>& link;
  const Matrix<Scalar>& variation;
  bool backward;
};

/// The integral over the half step of an element M(u) = L + D u, u = -1/2 .. 1/2, times exp(2 i x u), with x
/// half the phase of the pair: L sin(x)/x + i D (sin x - x cos x)/(2 x^2). u measures phase, not time, so that a frequency
/// which changes by dw about w adds -L dw/w to D; both rules together keep the error of order 2 for any x.
template <class Scalar>
void filon(const Half<Scalar>& half, const Eigen::VectorXd& phase, Matrix<Complex>& w) {
  const Link<Scalar>& link = half.link;
  const double sign = half.backward ? -1.0 : 1.0;
  const Eigen::VectorXd change = link.right_energies - link.left_energies;
  const Eigen::ArrayXd cosine = phase.array().cos(), sine = phase.array().sin();
  const Eigen::Index levels = phase.size();
  w.setZero(levels, levels);
  for (Eigen::Index b = 0; b < levels; ++b)
    for (Eigen::Index a = 0; a < b; ++a) {
      const double x = phase[a] - phase[b];
      const double sin_x = sine[a] * cosine[b] - cosine[a] * sine[b], cos_x = cosine[a] * cosine[b] + sine[a] * sine[b];
      const bool slow = std::abs(x) < 1e-3;
      const double even = slow ? 1.0 - x * x / 6.0 : sin_x / x;
      const double odd = slow ? x / 6.0 : (sin_x - x * cos_x) / (2.0 * x * x);
      const double mean = link.mean_energies[a] - link.mean_energies[b], differs = change[a] - change[b];
      const double chirp = std::abs(differs) < std::abs(mean) ? differs / mean : std::copysign(1.0, differs * mean);
      Scalar variation = -chirp * link.rotation(a, b);
      if (half.variation.size() != 0) variation += half.variation(a, b);
      w(a, b) = sign * even * link.rotation(a, b) + Complex(0, odd) * variation;
      w(b, a) = -std::conj(w(a, b));
    }
  if constexpr (!std::is_same_v<Scalar, double>) w.diagonal() = sign * link.rotation.diagonal();
}

/// Turns that come and go within a half step leave a shift of the levels behind, the second term of
/// the Magnus series: i sum_b L_ab L_bc (1 - sin(2x)/2x)/2x, x half the phase of a and b; a and c
/// at nearly one energy, where alone it adds up.
template <class Scalar>
void add_second_order(const Half<Scalar>& half, const Eigen::VectorXd& phase, StepBuffers<Scalar>& buffers, Matrix<Complex>& w) {
  const Eigen::Index levels = phase.size();
  const double sign = half.backward ? -1.0 : 1.0;
  buffers.turn = sign * half.link.rotation;
  buffers.weighted.resize(levels, levels);
  for (Eigen::Index b = 0; b < levels; ++b)
    for (Eigen::Index a = 0; a < levels; ++a) {
      const double x = 2.0 * (phase[a] - phase[b]);
      buffers.weighted(a, b) = (std::abs(x) < 1e-3 ? x / 6.0 : (1.0 - std::sin(x) / x) / x) * buffers.turn(a, b);
    }
  multiply<Scalar>(buffers.weighted, buffers.turn, buffers.shifts, buffers.scratch);
  for (Eigen::Index c = 0; c < levels; ++c)
    for (Eigen::Index a = 0; a < levels; ++a) {
      const double x = phase[a] - phase[c];
      const double slow = std::abs(x) < 1e-3 ? 1.0 - x * x / 6.0 : std::sin(x) / x;
      const Complex both = Complex(buffers.shifts(a, c)) + std::conj(Complex(buffers.shifts(c, a)));
      w(a, c) += Complex(0, 0.5 * slow) * both;
    }
}

/// What one half step does to amplitudes, from frame to frame.
template <class Scalar>
void half_map(const Half<Scalar>& half, const Eigen::VectorXd& shift, double h, StepBuffers<Scalar>& buffers, Matrix<Complex>& map) {
  const Link<Scalar>& link = half.link;
  const Matrix<Scalar>& before = half.backward ? link.right_basis : link.left_basis;
  const Matrix<Scalar>& after = half.backward ? link.left_basis : link.right_basis;
  const Eigen::VectorXd phase = 0.5 * h * (link.mean_energies + shift);
  Eigen::VectorXcd factor(phase.size());
  for (Eigen::Index a = 0; a < phase.size(); ++a) factor[a] = std::polar(1.0, -phase[a]);
  filon<Scalar>(half, phase, buffers.w);
  add_second_order<Scalar>(half, phase, buffers, buffers.w);
  rotation_exponential(buffers.w, map, buffers.scratch);
  for (Eigen::Index b = 0; b < map.cols(); ++b)
    for (Eigen::Index a = 0; a < map.rows(); ++a) map(a, b) *= factor[a] * factor[b];
  if (before.size() != 0) map = product<Complex>(map, before.adjoint().template cast<Complex>());
  if (after.size() != 0) map = product<Complex>(after.template cast<Complex>(), map);
}

/// Levels that move carry an admixture M/(i w) of each other along. It does not decay as a free
/// coherence does: the relaxation of a step that spans many turns of w acts on the state without it. Y weighs the
/// admixture with 1 - sin(x)/x, x half the phase of the whole step, and so leaves what steps resolve to them.
template <class Scalar>
void admixture(const StepFrames<Scalar>& step, const Eigen::VectorXd& shift, double h, bool backward, Matrix<Complex>& y) {
  const Eigen::VectorXd phase = h * (step.middle.energies + shift);
  const double sign = backward ? -1.0 : 1.0;
  const Eigen::Index levels = phase.size();
  y.setZero(levels, levels);
  for (Eigen::Index b = 0; b < levels; ++b)
    for (Eigen::Index a = 0; a < b; ++a) {
      const double x = 0.5 * (phase[a] - phase[b]);
      const double weight = std::abs(x) < 1e-3 ? x / 12.0 : (1.0 - std::sin(x) / x) / (2.0 * x);
      const Scalar rotation = step.first.rotation(a, b) + step.second.rotation(a, b);
      y(a, b) = Complex(0, -sign * weight) * rotation;
      y(b, a) = -std::conj(y(a, b));
    }
}

/// Most that the relaxation of an admixture y moves a population in time h: its coherences decay and are made
/// anew all the time, an exchange at twice their decay times |y|^2.
double exchanged(const Matrix<Complex>& y, const DaviesTable& table, double h) {
  double most = 0;
  for (Eigen::Index a = 0; a < y.rows(); ++a) {
    double sum = 0;
    for (Eigen::Index b = 0; b < y.cols(); ++b) sum -= 2.0 * table.loss(a, b).real() * std::norm(y(a, b));
    most = std::max(most, h * sum);
  }
  return most;
}

std::vector<std::vector<std::uint32_t>> connected(const DaviesTable& table) {
  std::vector<std::uint32_t> root(table.coupled.size());
  std::iota(root.begin(), root.end(), 0U);
  const auto find = [&](std::uint32_t p) {
    while (root[p] != p) p = root[p] = root[root[p]];
    return p;
  };
  for (const auto& term : table.terms) {
    const auto x = find(term.target), y = find(term.source);
    root[std::max(x, y)] = std::min(x, y);
  }
  std::vector<std::vector<std::uint32_t>> lists(root.size());
  for (std::uint32_t p = 0; p < root.size(); ++p) lists[find(p)].push_back(p);
  std::erase_if(lists, [](const auto& list) { return list.empty(); });
  return lists;
}

}  // namespace

template <class Scalar>
double advance(const StepFrames<Scalar>& step, const DaviesTable& table, double h, bool backward, Eigen::MatrixXcd& rho,
             StepBuffers<Scalar>& buffers) {
  Scratch& scratch = buffers.scratch;
  double unresolved = 0;
  const bool same_labels = step.first.right_basis.size() == 0 && step.second.left_basis.size() == 0;
  if (same_labels)
    buffers.variation = step.second.rotation - step.first.rotation;
  else
    buffers.variation.resize(0, 0);
  const Link<Scalar>&start = backward ? step.second : step.first, &end = backward ? step.first : step.second;
  half_map<Scalar>({start, buffers.variation, backward}, table.shift, 0.5 * h, buffers, buffers.before);
  half_map<Scalar>({end, buffers.variation, backward}, table.shift, 0.5 * h, buffers, buffers.after);
  if (same_labels) {
    admixture<Scalar>(step, table.shift, h, backward, buffers.w);
    unresolved = exchanged(buffers.w, table, h);
    rotation_exponential(buffers.w, buffers.carried, scratch);
    multiply<Complex>(buffers.after, buffers.carried, buffers.r, scratch);
    buffers.after.swap(buffers.r);
    buffers.carried.adjointInPlace();
    multiply<Complex>(buffers.carried, buffers.before, buffers.r, scratch);
    buffers.before.swap(buffers.r);
  }
  turn(buffers.before, rho, scratch);
  relax(table, h, rho);
  turn(buffers.after, rho, scratch);
  return unresolved;
}

HoldMap::HoldMap(const Eigen::VectorXd& energies, const DaviesTable& table)
    : exponent_(table.loss), single_(static_cast<std::size_t>(table.loss.size()), 1) {
  const Eigen::Index levels = energies.size();
  for (Eigen::Index b = 0; b < levels; ++b)
    for (Eigen::Index a = 0; a < levels; ++a)
      exponent_(a, b) -= Complex(0, energies[a] - energies[b] + table.shift[a] - table.shift[b]);
  std::vector<std::pair<std::size_t, Eigen::Index>> place(table.coupled.size());
  for (const auto& list : connected(table)) {
    Block block;
    block.frequency = 0;
    const auto size = static_cast<Eigen::Index>(list.size());
    block.generator = Eigen::MatrixXcd::Zero(size, size);
    for (Eigen::Index k = 0; k < size; ++k) {
      const auto row = list[static_cast<std::size_t>(k)];
      const auto pair = table.coupled[row];
      place[row] = {blocks_.size(), k};
      single_[pair] = 0;
      block.pairs.push_back(pair);
      block.frequency += energies[pair % levels] - energies[pair / levels];
    }
    block.frequency /= static_cast<double>(size);
    for (Eigen::Index k = 0; k < size; ++k) block.generator(k, k) = exponent_.data()[block.pairs[static_cast<std::size_t>(k)]] + Complex(0, block.frequency);
    blocks_.push_back(std::move(block));
  }
  for (const auto& term : table.terms) {
    const auto [row, column] = std::pair(place[term.target], place[term.source]);
    blocks_[row.first].generator(row.second, column.second) += term.value;
  }
}

void HoldMap::prepare(double t) {
  if (std::abs(t - prepared_) <= 1e-13 * std::abs(t)) return;
  for (Block& block : blocks_) block.map = dense_exponential(block.generator, t);
  exponentials_ += blocks_.size();
  prepared_ = t;
}

void HoldMap::apply(double t, Eigen::MatrixXcd& rho) {
  prepare(t);
  for (const Block& block : blocks_) {
    Eigen::VectorXcd state(static_cast<Eigen::Index>(block.pairs.size()));
    for (std::size_t k = 0; k < block.pairs.size(); ++k) state[static_cast<Eigen::Index>(k)] = rho.data()[block.pairs[k]];
    state = std::polar(1.0, -block.frequency * t) * (block.map * state);
    for (std::size_t k = 0; k < block.pairs.size(); ++k) rho.data()[block.pairs[k]] = state[static_cast<Eigen::Index>(k)];
  }
  for (Eigen::Index p = 0; p < rho.size(); ++p)
    if (single_[static_cast<std::size_t>(p)]) rho.data()[p] *= std::exp(t * exponent_.data()[p]);
}

template double advance<double>(const StepFrames<double>&, const DaviesTable&, double, bool, Eigen::MatrixXcd&, StepBuffers<double>&);
template double advance<Complex>(const StepFrames<Complex>&, const DaviesTable&, double, bool, Eigen::MatrixXcd&, StepBuffers<Complex>&);

}  // namespace tarn::runtime
