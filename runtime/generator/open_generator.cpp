#include "runtime/generator/open_generator.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <cstring>

#include "lang/support/check.h"
#include "runtime/integrate/packs.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Index = Eigen::Index;

const Complex* pairs(const double* x) { return reinterpret_cast<const Complex*>(x); }

/// out = m x, m a square matrix column after column.
TARN_HOST_CLONES
void multiply_vector(const double* m, std::size_t size, const double* x, double* out) {
  std::size_t i = 0;
  // Four packs of rows at a time stay in registers.
  for (; i + 4 * kPackWidth <= size; i += 4 * kPackWidth) {
    Pack sum[4] = {};
    for (std::size_t j = 0; j < size; ++j) {
      for (std::size_t p = 0; p < 4; ++p) {
        Pack column;
        std::memcpy(&column, m + j * size + i + p * kPackWidth, sizeof column);
        sum[p] += column * x[j];
      }
    }
    std::memcpy(out + i, sum, sizeof sum);
  }
  for (; i + kPackWidth <= size; i += kPackWidth) {
    Pack sum = {};
    for (std::size_t j = 0; j < size; ++j) {
      Pack column;
      std::memcpy(&column, m + j * size + i, sizeof column);
      sum += column * x[j];
    }
    std::memcpy(out + i, &sum, sizeof sum);
  }
  for (; i < size; ++i) {
    double sum = 0;
    for (std::size_t j = 0; j < size; ++j) sum += m[j * size + i] * x[j];
    out[i] = sum;
  }
}

}  // namespace

OpenGenerator::OpenGenerator(std::shared_ptr<const NoiseTable> table, const LabOperators& lab)
    : table_(std::move(table)), lab_(lab), layout_(table_->layout()) {
  for (const Eigen::MatrixXcd& right : table_->fixed_right()) {
    const Eigen::MatrixXcd diagonal = right.diagonal().asDiagonal();
    if (right != diagonal || right.imag().cwiseAbs().maxCoeff() != 0) {
      diagonal_right_.clear();
      break;
    }
    diagonal_right_.push_back(right.diagonal().real());
  }
}

void OpenGenerator::fill(Instant& instant, double s, double t) {
  if (instant.filled && instant.s == s && (!table_->along_time() || instant.t == t)) return;
  instant.noise.resize(layout_.size());
  table_->at(s, t, instant.noise.data());
  instant.s = s;
  instant.t = t;
  instant.filled = true;
}

std::vector<bool> OpenGenerator::prepare(std::span<const double> s, std::span<const double> t) {
  const std::size_t count = s.size();
  if (instants_.size() < count) instants_.resize(count);
  coefficients_.resize(lab_.rows * count);
  lab_.coefficients(s, t, coefficients_.data());
  std::vector<bool> good(count, true);
  for (std::size_t k = 0; k < count; ++k) {
    Instant& instant = instants_[k];
    fill(instant, s[k], t[k]);
    const auto coefficient = [&](std::uint32_t row) {
      const double value = coefficients_[row * count + k];
      if (!std::isfinite(value)) good[k] = false;
      return value;
    };
    instant.drift = Eigen::Map<const Eigen::MatrixXcd>(pairs(instant.noise.data() + layout_.drift()), layout_.dimension, layout_.dimension);
    const MatrixSum& h = lab_.hamiltonian;
    for (std::size_t g = 0; g < h.rows.size(); ++g) instant.drift += Complex(0, -coefficient(h.rows[g])) * h.matrices[g];
    instant.jumps.clear();
    for (const MatrixSum& jump : lab_.jumps) {
      Eigen::MatrixXcd op = Eigen::MatrixXcd::Zero(layout_.dimension, layout_.dimension);
      for (std::size_t g = 0; g < jump.rows.size(); ++g) op += std::sqrt(0.5) * coefficient(jump.rows[g]) * jump.matrices[g];
      instant.drift.noalias() -= op.adjoint() * op;
      instant.jumps.push_back(std::move(op));
    }
    if (is_small()) list_terms(instant);
  }
  return good;
}

bool OpenGenerator::is_small() const {
  return !layout_.split && (layout_.dimension == 2 || layout_.dimension == 4 || layout_.dimension == 8);
}

void OpenGenerator::list_terms(Instant& at) const {
  const auto numbers = [](const Eigen::MatrixXcd& matrix) { return reinterpret_cast<const double*>(matrix.data()); };
  at.terms.clear();
  for (std::size_t j = 0; j < layout_.terms; ++j) {
    SmallTerm& term = at.terms.emplace_back();
    term.real = layout_.real_left;
    term.left = at.noise.data() + layout_.left() + (term.real ? 1 : 2) * j * layout_.square();
    if (!layout_.own_right) continue;
    if (!diagonal_right_.empty()) term.diagonal = diagonal_right_[j].data();
    else term.right = layout_.right_along ? at.noise.data() + layout_.right() + 2 * j * layout_.square() : numbers(table_->fixed_right()[j]);
  }
  for (const Eigen::MatrixXcd& jump : at.jumps) at.terms.push_back({numbers(jump), false, nullptr, nullptr});
}

void OpenGenerator::add_split(const Instant& at, const Eigen::MatrixXcd& rho, Eigen::MatrixXcd& change) {
  const Index n = layout_.dimension;
  const std::size_t pair_count = layout_.pairs(), proper = layout_.proper_pairs();
  even_.resize(static_cast<Index>(pair_count));
  even_out_.resize(static_cast<Index>(pair_count));
  odd_.resize(static_cast<Index>(proper));
  odd_out_.resize(static_cast<Index>(proper));
  for (Index j = 0, even = 0, odd = 0; j < n; ++j)
    for (Index i = 0; i <= j; ++i) {
      even_[even++] = rho(i, j).real();
      if (i < j) odd_[odd++] = rho(i, j).imag();
    }
  multiply_vector(at.noise.data() + layout_.symmetric(), pair_count, even_.data(), even_out_.data());
  multiply_vector(at.noise.data() + layout_.antisymmetric(), proper, odd_.data(), odd_out_.data());
  for (Index j = 0, even = 0, odd = 0; j < n; ++j)
    for (Index i = 0; i <= j; ++i) {
      const Complex value(even_out_[even++], i < j ? odd_out_[odd++] : 0.0);
      change(i, j) += value;
      if (i < j) change(j, i) += std::conj(value);
    }
}

void OpenGenerator::apply_large(const Instant& at, const double* rho, double* out) {
  const Index n = layout_.dimension;
  state_ = Eigen::Map<const Eigen::MatrixXcd>(pairs(rho), n, n);
  const auto terms = static_cast<Index>(layout_.split || layout_.real_left ? 0 : layout_.terms);
  const auto jumps = static_cast<Index>(at.jumps.size());
  const Index blocks = 1 + terms + jumps;
  stacked_left_.resize(n, blocks * n);
  stacked_right_.resize(blocks * n, n);
  stacked_left_.leftCols(n) = at.drift;
  stacked_right_.topRows(n) = state_;
  for (Index j = 0; j < terms; ++j) {
    const auto index = static_cast<std::size_t>(j);
    const Eigen::Map<const Eigen::MatrixXcd> left(pairs(at.noise.data() + layout_.left() + 2 * index * layout_.square()), n, n);
    stacked_left_.middleCols((1 + j) * n, n) = left;
    auto half = stacked_right_.middleRows((1 + j) * n, n);
    if (!layout_.own_right) half = product<Complex>(state_, left.adjoint());
    else if (!diagonal_right_.empty()) half = state_ * diagonal_right_[index].asDiagonal();
    else if (!layout_.right_along) half = product<Complex>(state_, table_->fixed_right()[index].adjoint());
    else half = product<Complex>(state_, Eigen::Map<const Eigen::MatrixXcd>(pairs(at.noise.data() + layout_.right() + 2 * index * layout_.square()), n, n).adjoint());
  }
  for (Index j = 0; j < jumps; ++j) {
    const Eigen::MatrixXcd& jump = at.jumps[static_cast<std::size_t>(j)];
    stacked_left_.middleCols((1 + terms + j) * n, n) = jump;
    stacked_right_.middleRows((1 + terms + j) * n, n) = product<Complex>(state_, jump.adjoint());
  }
  multiply<Complex>(stacked_left_, stacked_right_, change_, scratch_);
  if (layout_.real_left && !layout_.split) {
    // [Re; Im] times [L_1^T .. L_k^T], then [L_1 .. L_k] times what came out, block under block.
    const auto count = static_cast<Index>(layout_.terms);
    const Eigen::Map<const Eigen::MatrixXd> left(at.noise.data() + layout_.left(), n, count * n);
    real_state_.resize(2 * n, n);
    real_state_.topRows(n) = state_.real();
    real_state_.bottomRows(n) = state_.imag();
    real_left_.resize(n, count * n);
    for (Index j = 0; j < count; ++j) real_left_.middleCols(j * n, n) = left.middleCols(j * n, n).transpose();
    multiply<double>(real_state_, real_left_, real_out_, scratch_);
    real_right_.resize(count * n, 2 * n);
    for (Index j = 0; j < count; ++j) {
      real_right_.block(j * n, 0, n, n) = real_out_.block(0, j * n, n, n);
      real_right_.block(j * n, n, n, n) = real_out_.block(n, j * n, n, n);
    }
    multiply<double>(left, real_right_, real_out_, scratch_);
    change_.real() += real_out_.leftCols(n);
    change_.imag() += real_out_.rightCols(n);
  }
  Eigen::Map<Eigen::MatrixXcd> result(reinterpret_cast<Complex*>(out), n, n);
  if (!layout_.split) {
    result = change_ + change_.adjoint();
    return;
  }
  stacked_left_ = change_ + change_.adjoint();
  add_split(at, state_, stacked_left_);
  result = stacked_left_;
}

void OpenGenerator::apply(std::size_t k, const double* rho, double* out) {
  const Instant& at = instants_[k];
  if (is_small()) {
    return apply_small(layout_.dimension, reinterpret_cast<const double*>(at.drift.data()), at.terms, rho, out);
  }
  apply_large(at, rho, out);
}

Eigen::MatrixXcd OpenGenerator::dense(std::size_t k) {
  const Index n = layout_.dimension;
  Eigen::MatrixXcd result(n * n, n * n), unit = Eigen::MatrixXcd::Zero(n, n), first(n, n), second(n, n);
  const auto image = [&](Eigen::MatrixXcd& out) {
    apply(k, reinterpret_cast<const double*>(unit.data()), reinterpret_cast<double*>(out.data()));
  };
  // apply() takes Hermitian matrices: |i><j| is (a - i b)/2 of a = |i><j| + |j><i|, b = i|i><j| - i|j><i|.
  for (Index j = 0; j < n; ++j) {
    for (Index i = 0; i <= j; ++i) {
      if (i == j) {
        unit(i, i) = 1;
        image(first);
        unit(i, i) = 0;
        result.col(i + n * i) = first.reshaped();
        continue;
      }
      unit(i, j) = unit(j, i) = 1;
      image(first);
      unit(i, j) = Complex(0, 1);
      unit(j, i) = Complex(0, -1);
      image(second);
      unit(i, j) = unit(j, i) = 0;
      result.col(i + n * j) = 0.5 * (first - Complex(0, 1) * second).reshaped();
      result.col(j + n * i) = 0.5 * (first + Complex(0, 1) * second).reshaped();
    }
  }
  return result;
}

}  // namespace tarn::runtime
