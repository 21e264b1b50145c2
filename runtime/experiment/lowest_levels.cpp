#include "runtime/experiment/lowest_levels.h"

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>
#include <cstdint>
#include <vector>

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

using Eigen::Index;
using Eigen::MatrixXcd;
using Eigen::VectorXcd;
using Eigen::VectorXd;

constexpr double kResidual = 1e-10;  ///< Of the spectral width.
constexpr Index kBlock = 4;
constexpr Index kLargeDimension = Index{1} << 17;
constexpr Index kProductsPerLevel = 4000;

/// A fixed sequence of numbers in [-1, 1): 64-bit mixing of a counter (Weyl sequence).
class Noise {
 public:
  double next() {
    state_ += 0x9e3779b97f4a7c15u;
    std::uint64_t z = state_;
    z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
    z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
    z ^= z >> 31;
    return static_cast<double>(z >> 11) * 0x1p-52 - 1.0;
  }
  VectorXcd vector(Index n) {
    VectorXcd v(n);
    for (Index i = 0; i < n; ++i) v[i] = next();
    return v;
  }

 private:
  std::uint64_t state_ = 1;
};

/// An orthonormal basis, its image under H, and the projection of H on it.
class Space {
 public:
  Space(Index dimension, Index capacity, const Product& product)
      : basis_(dimension, capacity), image_(dimension, capacity), projected_(MatrixXcd::Zero(capacity, capacity)),
        product_(product) {}

  Index size() const { return size_; }
  Index capacity() const { return basis_.cols(); }
  Index products() const { return products_; }

  /// Adds the part of v outside the space; false if there is none left.
  bool add(VectorXcd v) {
    if (size_ == capacity()) return false;
    const double before = v.norm();
    if (!(before > 0)) return false;
    v /= before;
    for (int pass = 0; pass < 3; ++pass) {
      v -= basis_.leftCols(size_) * (basis_.leftCols(size_).adjoint() * v);
      const double left = v.norm();
      if (!(left > 1e-13)) return false;
      v /= left;
    }
    basis_.col(size_) = v;
    product_(v.data(), image_.col(size_).data());
    ++products_;
    ++size_;
    const VectorXcd column = basis_.leftCols(size_).adjoint() * image_.col(size_ - 1);
    projected_.block(0, size_ - 1, size_, 1) = column;
    projected_.block(size_ - 1, 0, 1, size_) = column.adjoint();
    projected_(size_ - 1, size_ - 1) = column[size_ - 1].real();
    return true;
  }

  void solve() {
    const Eigen::SelfAdjointEigenSolver<MatrixXcd> solver(projected_.topLeftCorner(size_, size_));
    values_ = solver.eigenvalues();
    mixing_ = solver.eigenvectors();
  }
  const VectorXd& values() const { return values_; }
  VectorXcd vector(Index k) const { return basis_.leftCols(size_) * mixing_.col(k); }
  VectorXcd residual(Index k) const {
    return image_.leftCols(size_) * mixing_.col(k) - values_[k] * vector(k);
  }

  /// Shrinks the space to its `keep` lowest solutions.
  void restart(Index keep) {
    keep = std::min(keep, size_);
    const MatrixXcd basis = basis_.leftCols(size_) * mixing_.leftCols(keep);
    const MatrixXcd image = image_.leftCols(size_) * mixing_.leftCols(keep);
    basis_.leftCols(keep) = basis;
    image_.leftCols(keep) = image;
    projected_.setZero();
    projected_.diagonal().head(keep) = values_.head(keep).cast<std::complex<double>>();
    size_ = keep;
    mixing_ = MatrixXcd::Identity(keep, keep);
    values_ = VectorXd(values_.head(keep));
  }

 private:
  MatrixXcd basis_, image_, projected_;
  const Product& product_;
  Index size_ = 0, products_ = 0;
  VectorXd values_;
  MatrixXcd mixing_;
};

/// Highest minus lowest Ritz value of a short Lanczos run: a lower estimate, off by a few percent.
double estimate_width(Index dimension, const Product& product, Noise& noise) {
  const Index steps = std::min<Index>(24, dimension);
  Space space(dimension, steps, product);
  if (!space.add(noise.vector(dimension))) return 0;
  for (Index i = 1; i < steps; ++i) {
    space.solve();
    // In a space grown from one vector all residuals point the same way, so this is a Lanczos step.
    if (!space.add(space.residual(0))) break;
  }
  space.solve();
  return space.values()[space.size() - 1] - space.values()[0];
}

struct Search {
  Space& space;
  Index count;
  double accepted;  ///< Residual norm that counts as converged.
  Noise& noise;
};

/// Residual a solution must reach: the wanted ones the accepted one, the guard above them only so
/// small that it is known to lie above.
double demanded(const Search& search, Index k) {
  if (k < search.count) return search.accepted;
  const VectorXd& values = search.space.values();
  return std::max(search.accepted, 0.1 * (values[k] - values[search.count - 1]));
}

/// Grows the space by the residuals of the lowest open solutions. Returns how many are open.
Index expand(const Search& search) {
  Space& space = search.space;
  std::vector<VectorXcd> additions;
  Index open = 0;
  for (Index k = 0; k <= search.count && k < space.size(); ++k) {
    VectorXcd residual = space.residual(k);
    if (residual.norm() <= demanded(search, k)) continue;
    ++open;
    if (static_cast<Index>(additions.size()) < kBlock) additions.push_back(std::move(residual));
  }
  if (open == 0) return 0;
  const Index room = space.capacity() - space.size();
  if (room < static_cast<Index>(additions.size())) space.restart(search.count + kBlock);
  bool grown = false;
  for (VectorXcd& addition : additions) grown |= space.add(std::move(addition));
  if (!grown) space.add(search.noise.vector(search.space.vector(0).size()));
  return open;
}

Result<Done, RunError> converge(const Search& search, const Interrupted& interrupted) {
  const Index limit = search.space.products() + kProductsPerLevel * (search.count + 1);
  while (search.space.products() < limit) {
    search.space.solve();
    if (!search.space.values().allFinite()) return Unexpected{RunError{"not_finite", "a level is not finite"}};
    if (expand(search) == 0) return Done{};
    if (interrupted && interrupted()) return Unexpected{RunError{"interrupted", "interrupted"}};
  }
  return Unexpected{RunError{"levels_not_found", "the lowest levels could not be told apart in time"}};
}

Levels take(const Search& search, double width) {
  Levels levels;
  levels.energies = search.space.values().head(search.count);
  levels.vectors.resize(search.space.vector(0).size(), search.count);
  for (Index k = 0; k < search.count; ++k) {
    levels.vectors.col(k) = search.space.vector(k);
    levels.residual = std::max(levels.residual, search.space.residual(k).norm());
  }
  levels.width = width;
  return levels;
}

}  // namespace

Levels all_levels(const MatrixXcd& matrix) {
  Levels levels;
  if (matrix.imag().isZero(0)) {
    const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> solver(matrix.real());
    levels.energies = solver.eigenvalues();
    levels.vectors = solver.eigenvectors().cast<std::complex<double>>();
  } else {
    const Eigen::SelfAdjointEigenSolver<MatrixXcd> solver(matrix);
    levels.energies = solver.eigenvalues();
    levels.vectors = solver.eigenvectors();
  }
  levels.width = levels.energies[levels.energies.size() - 1] - levels.energies[0];
  // Backward error of the symmetric QR algorithm: a small multiple of the rounding unit.
  levels.residual = 8 * 2.3e-16 * std::max(std::abs(levels.energies[0]), std::abs(levels.energies.tail(1)[0]));
  levels.complete = true;
  return levels;
}

Result<Levels, RunError> lowest_levels(Index dimension, Index count, const Product& product, const MatrixXcd& start,
                                       const Interrupted& interrupted) {
  TARN_CHECK(count >= 1 && 8 * count <= dimension);
  Noise noise;
  const double width = estimate_width(dimension, product, noise);
  // Two stored vectors a column: large systems get few columns.
  const Index roomy = dimension < kLargeDimension ? std::max<Index>(3 * count + 4 * kBlock, 48) : 2 * count + 4 * kBlock;
  const Index capacity = std::min(dimension, roomy);
  Space space(dimension, capacity, product);
  for (Index k = 0; k < std::min(start.cols(), count + kBlock); ++k) space.add(start.col(k));
  for (Index k = 0; k < kBlock + 1; ++k) space.add(noise.vector(dimension));
  const Search search{space, count, std::max(kResidual * width, 1e-300), noise};
  while (space.size() <= count) {
    if (!space.add(noise.vector(dimension))) break;
  }
  // Twice: the second round starts from the levels found and fresh vectors.
  for (int round = 0; round < 2; ++round) {
    const auto done = converge(search, interrupted);
    if (!done) return Unexpected{done.error()};
    if (round == 1) break;
    space.restart(count);
    for (Index k = 0; k < kBlock; ++k) space.add(noise.vector(dimension));
  }
  return take(search, width);
}

}  // namespace tarn::runtime
