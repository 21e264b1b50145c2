#include "runtime/experiment/lowest_levels.h"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <utility>
#include <vector>

#include "lang/support/check.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {
namespace {

using Eigen::Index;
using Eigen::MatrixXcd;
using Eigen::VectorXd;
using Complex = std::complex<double>;

template <class Scalar>
using Vector = Eigen::Matrix<Scalar, Eigen::Dynamic, 1>;
template <class Scalar>
using Matrix = Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic>;

constexpr double kResidual = 1e-10;  ///< Of the spectral width.
constexpr Index kBlock = 4;
constexpr int kBlockPowers = 4;
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
  template <class Scalar>
  Vector<Scalar> vector(Index n) {
    Vector<Scalar> v(n);
    for (Index i = 0; i < n; ++i) v[i] = next();
    return v;
  }

 private:
  std::uint64_t state_ = 1;
};

// Every form of product that Eigen meets is compiled anew: these are all that a space needs.

/// The parts of v along the first `size` columns.
template <class Scalar>
Vector<Scalar> parts(const Matrix<Scalar>& columns, Index size, const Vector<Scalar>& v) {
  return columns.leftCols(size).adjoint() * v;
}

template <class Scalar>
Vector<Scalar> mixed(const Matrix<Scalar>& columns, Index size, const Vector<Scalar>& parts) {
  return columns.leftCols(size) * parts;
}

/// The first `size` columns become their first `mixing.cols()` mixtures.
template <class Scalar>
void mix(Matrix<Scalar>& columns, Index size, const Matrix<Scalar>& mixing) {
  const Matrix<Scalar> mixtures = columns.leftCols(size) * mixing;
  columns.leftCols(mixing.cols()) = mixtures;
}

/// An orthonormal basis, its image under H, and the projection of H on it.
template <class Scalar>
class Space {
 public:
  Space(Index dimension, Index capacity, const HermitianProduct& product)
      : basis_(dimension, capacity), image_(dimension, capacity),
        projected_(Matrix<Scalar>::Zero(capacity, capacity)), product_(product) {}

  Index size() const { return size_; }
  Index capacity() const { return basis_.cols(); }
  Index products() const { return products_; }
  Index vector_size() const { return basis_.rows(); }

  /// Adds the part of v outside the space; false if there is none left.
  bool add(Vector<Scalar> v) {
    if (size_ == capacity()) return false;
    const double before = v.norm();
    if (!(before > 0)) return false;
    v /= before;
    // Once more where the first pass took away so much that rounding shows.
    for (double left = 0; left < 0.7;) {
      v -= mixed<Scalar>(basis_, size_, parts<Scalar>(basis_, size_, v));
      left = v.norm();
      if (!(left > 1e-13)) return false;
      v /= left;
    }
    basis_.col(size_) = v;
    apply(v, size_);
    ++products_;
    ++size_;
    const Vector<Scalar> column = parts<Scalar>(basis_, size_, image_.col(size_ - 1));
    projected_.block(0, size_ - 1, size_, 1) = column;
    projected_.block(size_ - 1, 0, 1, size_) = column.adjoint();
    projected_(size_ - 1, size_ - 1) = std::real(column[size_ - 1]);
    return true;
  }

  void solve() {
    auto system = eigensystem(Matrix<Scalar>(projected_.topLeftCorner(size_, size_)));
    values_ = std::move(system.values);
    mixing_ = std::move(system.vectors);
  }
  /// H times basis vector k.
  Vector<Scalar> image(Index k) const { return image_.col(k); }
  const VectorXd& values() const { return values_; }
  Vector<Scalar> vector(Index k) const { return mixed<Scalar>(basis_, size_, mixing_.col(k)); }
  Vector<Scalar> residual(Index k) const {
    return mixed<Scalar>(image_, size_, mixing_.col(k)) - values_[k] * vector(k);
  }

  /// Shrinks the space to its `keep` lowest solutions.
  void restart(Index keep) {
    keep = std::min(keep, size_);
    const Matrix<Scalar> mixing = mixing_.leftCols(keep);
    mix<Scalar>(basis_, size_, mixing);
    mix<Scalar>(image_, size_, mixing);
    projected_.setZero();
    projected_.diagonal().head(keep) = values_.head(keep).template cast<Scalar>();
    size_ = keep;
    mixing_ = Matrix<Scalar>::Identity(keep, keep);
    values_ = VectorXd(values_.head(keep));
  }

 private:
  void apply(const Vector<Scalar>& v, Index column) {
    if constexpr (std::is_same_v<Scalar, Complex>) {
      product_(v.data(), image_.col(column).data());
    } else {
      in_ = v.template cast<Complex>();
      out_.resize(v.size());
      product_(in_.data(), out_.data());
      image_.col(column) = out_.real();
    }
  }

  Matrix<Scalar> basis_, image_, projected_;
  const HermitianProduct& product_;
  Index size_ = 0, products_ = 0;
  VectorXd values_;
  Matrix<Scalar> mixing_;
  Vector<Complex> in_, out_;
};

/// Highest minus lowest Ritz value of a short Lanczos run: a lower estimate, off by a few percent.
template <class Scalar>
double estimate_width(Index dimension, const HermitianProduct& product, Noise& noise, const Interrupted& interrupted) {
  const Index steps = std::min<Index>(24, dimension);
  Space<Scalar> space(dimension, steps, product);
  if (!space.add(noise.vector<Scalar>(dimension))) return 0;
  for (Index i = 1; i < steps && !(interrupted && interrupted()); ++i) {
    space.solve();
    // In a space grown from one vector all residuals point the same way, so this is a Lanczos step.
    if (!space.add(space.residual(0))) break;
  }
  space.solve();
  return space.values()[space.size() - 1] - space.values()[0];
}

template <class Scalar>
struct Search {
  Space<Scalar>& space;
  Index count;
  double accepted;  ///< Residual norm that counts as converged.
  Noise& noise;
  const Interrupted& interrupted;

  bool stopped() const { return interrupted && interrupted(); }
};

/// Residual a solution must reach: the wanted ones the accepted one, the guard above them only so
/// small that it is known to lie above.
template <class Scalar>
double demanded(const Search<Scalar>& search, Index k) {
  if (k < search.count) return search.accepted;
  const VectorXd& values = search.space.values();
  return std::max(search.accepted, 0.1 * (values[k] - values[search.count - 1]));
}

/// Grows the space by the residuals of the lowest open solutions. Returns how many are open. Ends early where
/// the search is stopped.
template <class Scalar>
Index expand(const Search<Scalar>& search) {
  Space<Scalar>& space = search.space;
  std::vector<Vector<Scalar>> additions;
  Index open = 0;
  for (Index k = 0; k <= search.count && k < space.size(); ++k) {
    Vector<Scalar> residual = space.residual(k);
    if (residual.norm() <= demanded(search, k)) continue;
    ++open;
    if (static_cast<Index>(additions.size()) < kBlock) additions.push_back(std::move(residual));
  }
  if (open == 0) return 0;
  const Index block = static_cast<Index>(additions.size());
  if (space.capacity() - space.size() < block) space.restart(search.count + kBlock);
  Index first = space.size();
  for (Vector<Scalar>& addition : additions) {
    if (search.stopped()) return open;
    space.add(std::move(addition));
  }
  if (space.size() == first) space.add(search.noise.template vector<Scalar>(space.vector_size()));
  // A few more powers of H on the new vectors before the next solution of the small problem.
  for (int power = 1; power < kBlockPowers && space.capacity() - space.size() >= block; ++power) {
    const Index last = space.size();
    for (Index k = first; k < last; ++k) {
      if (search.stopped()) return open;
      space.add(space.image(k));
    }
    first = last;
  }
  return open;
}

template <class Scalar>
Result<Done, RunError> converge(const Search<Scalar>& search) {
  const Index limit = search.space.products() + kProductsPerLevel * (search.count + 1);
  while (search.space.products() < limit) {
    if (search.stopped()) return Unexpected{RunError{"interrupted", "stopped before the end"}};
    search.space.solve();
    if (!search.space.values().allFinite()) return Unexpected{RunError{"not_finite", "a level is not finite"}};
    if (expand(search) == 0) return Done{};
  }
  return Unexpected{RunError{"levels_not_found", "the lowest levels could not be told apart in time"}};
}

template <class Scalar>
Levels take(const Search<Scalar>& search, double width) {
  Levels levels;
  levels.energies = search.space.values().head(search.count);
  levels.vectors.resize(search.space.vector_size(), search.count);
  for (Index k = 0; k < search.count; ++k) {
    levels.vectors.col(k) = search.space.vector(k).template cast<Complex>();
    levels.residual = std::max(levels.residual, search.space.residual(k).norm());
  }
  levels.width = width;
  return levels;
}

template <class Scalar>
Result<Levels, RunError> search_levels(Index dimension, Index count, const HermitianProduct& product,
                                       const Matrix<Scalar>& start, const Interrupted& interrupted) {
  Noise noise;
  const double width = estimate_width<Scalar>(dimension, product, noise, interrupted);
  // Two stored vectors a column: large systems get few columns.
  const Index roomy = dimension < kLargeDimension ? std::max<Index>(3 * count + 4 * kBlock, 48) : 2 * count + 4 * kBlock;
  const Index capacity = std::min(dimension, roomy);
  Space<Scalar> space(dimension, capacity, product);
  for (Index k = 0; k < std::min(start.cols(), count + kBlock); ++k) space.add(start.col(k));
  for (Index k = 0; k < kBlock + 1; ++k) space.add(noise.vector<Scalar>(dimension));
  const Search<Scalar> search{space, count, std::max(kResidual * width, 1e-300), noise, interrupted};
  while (space.size() <= count) {
    if (!space.add(noise.vector<Scalar>(dimension))) break;
  }
  // Twice: the second round starts from the levels found and fresh vectors.
  for (int round = 0; round < 2; ++round) {
    const auto done = converge(search);
    if (!done) return Unexpected{done.error()};
    if (round == 1) break;
    space.restart(count);
    for (Index k = 0; k < kBlock; ++k) space.add(noise.vector<Scalar>(dimension));
  }
  return take(search, width);
}

}  // namespace

Levels all_levels(const MatrixXcd& matrix) {
  Levels levels;
  if (matrix.imag().isZero(0)) {
    const auto system = eigensystem(Eigen::MatrixXd(matrix.real()));
    levels.energies = system.values;
    levels.vectors = system.vectors.cast<std::complex<double>>();
  } else {
    auto system = eigensystem(matrix);
    levels.energies = std::move(system.values);
    levels.vectors = std::move(system.vectors);
  }
  levels.width = levels.energies[levels.energies.size() - 1] - levels.energies[0];
  // Backward error of the symmetric QR algorithm: a small multiple of the rounding unit.
  levels.residual = 8 * 2.3e-16 * std::max(std::abs(levels.energies[0]), std::abs(levels.energies.tail(1)[0]));
  levels.complete = true;
  return levels;
}

Result<Levels, RunError> lowest_levels(Index dimension, Index count, const HermitianProduct& product, bool real,
                                       const MatrixXcd& start, const Interrupted& interrupted) {
  TARN_CHECK(count >= 1 && 8 * count <= dimension);
  if (real) return search_levels<double>(dimension, count, product, start.real(), interrupted);
  return search_levels<Complex>(dimension, count, product, start, interrupted);
}

}  // namespace tarn::runtime
