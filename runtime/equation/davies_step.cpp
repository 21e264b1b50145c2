#include "runtime/equation/davies_step.h"

#include <cmath>
#include <complex>
#include <numeric>

#include "runtime/integrate/dense_exponential.h"
#include "runtime/levels/product.h"
#include "runtime/levels/rotation.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

/// Elements times sin(x)/x, x = half the phase the pair collects; phases in half[a] = phi_a/2.
template <class Scalar>
Matrix<Scalar> filon(const Matrix<Scalar>& rotation, const Eigen::VectorXd& half) {
  const Eigen::ArrayXd cosine = half.array().cos(), sine = half.array().sin();
  Matrix<Scalar> w(rotation.rows(), rotation.cols());
  for (Eigen::Index b = 0; b < w.cols(); ++b)
    for (Eigen::Index a = 0; a < w.rows(); ++a) {
      const double x = half[a] - half[b];
      const double kernel = std::abs(x) < 1e-4 ? 1.0 - x * x / 6.0 : (sine[a] * cosine[b] - cosine[a] * sine[b]) / x;
      w(a, b) = rotation(a, b) * kernel;
    }
  return w;
}

/// Over one link in time h; shift: <a|H_LS|a> in the labels of the link.
template <class Scalar>
void cross(const Link<Scalar>& link, const Eigen::VectorXd& shift, double h, bool backward, Eigen::MatrixXcd& rho) {
  const Matrix<Scalar>& before = backward ? link.right_basis : link.left_basis;
  const Matrix<Scalar>& after = backward ? link.left_basis : link.right_basis;
  if (before.size() != 0) turn<Scalar>(Matrix<Scalar>(before.adjoint()), rho);
  const Eigen::VectorXd half = 0.5 * h * (link.mean_energies + shift);
  Matrix<Scalar> r = rotation_exponential<Scalar>(filon<Scalar>(link.rotation, half));
  if (backward) r.adjointInPlace();
  Eigen::VectorXcd phase(half.size());
  for (Eigen::Index a = 0; a < half.size(); ++a) phase[a] = std::polar(1.0, -half[a]);
  rho = phase.asDiagonal() * rho * phase.conjugate().asDiagonal();
  turn<Scalar>(r, rho);
  rho = phase.asDiagonal() * rho * phase.conjugate().asDiagonal();
  if (after.size() != 0) turn<Scalar>(after, rho);
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
void advance(const StepFrames<Scalar>& step, const DaviesTable& table, double h, bool backward, Eigen::MatrixXcd& rho) {
  cross<Scalar>(backward ? step.second : step.first, table.shift, 0.5 * h, backward, rho);
  relax(table, h, rho);
  cross<Scalar>(backward ? step.first : step.second, table.shift, 0.5 * h, backward, rho);
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

template void advance<double>(const StepFrames<double>&, const DaviesTable&, double, bool, Eigen::MatrixXcd&);
template void advance<Complex>(const StepFrames<Complex>&, const DaviesTable&, double, bool, Eigen::MatrixXcd&);

}  // namespace tarn::runtime
