#include "runtime/levels/link.h"

#include <Eigen/SVD>
#include <algorithm>
#include <cmath>
#include <complex>
#include <numeric>
#include <tuple>

#include "lang/support/check.h"
#include "runtime/levels/product.h"
#include "runtime/levels/rotation.h"
#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;
using Labels = std::vector<int>;

int count_of(const Labels& manifold) {
  return manifold.empty() ? 0 : 1 + *std::max_element(manifold.begin(), manifold.end());
}

std::vector<Labels> members(const Labels& manifold) {
  std::vector<Labels> lists(static_cast<std::size_t>(count_of(manifold)));
  for (std::size_t a = 0; a < manifold.size(); ++a) lists[static_cast<std::size_t>(manifold[a])].push_back(static_cast<int>(a));
  return lists;
}

/// Rotates each degenerate manifold of the columns so that its vectors point to separate manifolds
/// of the rows, where the rows tell it apart. Source: first order is degenerate perturbation
/// theory; diagonalising the manifold ordinal of the other side keeps every order.
template <class Scalar>
Matrix<Scalar> adapt_columns(Matrix<Scalar>& overlap, const Labels& columns, const Labels& rows) {
  Matrix<Scalar> basis;
  Eigen::VectorXd ordinal(overlap.rows());
  for (Eigen::Index r = 0; r < overlap.rows(); ++r) ordinal[r] = rows[static_cast<std::size_t>(r)];
  for (const Labels& manifold : members(columns)) {
    if (manifold.size() < 2) continue;
    const Matrix<Scalar> block = overlap(Eigen::all, manifold);
    const Eigen::VectorXd row_weight = block.rowwise().squaredNorm();
    Eigen::VectorXd weight = Eigen::VectorXd::Zero(count_of(rows));
    for (Eigen::Index r = 0; r < row_weight.size(); ++r) weight[rows[static_cast<std::size_t>(r)]] += row_weight[r];
    if (weight.maxCoeff() > static_cast<double>(manifold.size()) - 0.5) continue;
    const Matrix<Scalar> turn = eigensystem(product<Scalar>(block.adjoint(), ordinal.asDiagonal() * block)).vectors;
    if (basis.size() == 0) basis = Matrix<Scalar>::Identity(overlap.cols(), overlap.cols());
    basis(manifold, manifold) = turn;
    overlap(Eigen::all, manifold) = product<Scalar>(block, turn);
  }
  return basis;
}

/// Pairs every column with a row: largest products of manifold weights first.
/// Deterministic: ties are broken by index. Looks at all pairs, so distant labels never swap.
template <class Scalar>
Labels match(const Matrix<Scalar>& overlap, const Labels& columns, const Labels& rows) {
  const Eigen::Index size = overlap.rows();
  const Eigen::MatrixXd weight = overlap.cwiseAbs2();
  Eigen::MatrixXd by_column = Eigen::MatrixXd::Zero(size, count_of(columns));
  Eigen::MatrixXd by_row = Eigen::MatrixXd::Zero(count_of(rows), size);
  for (Eigen::Index k = 0; k < size; ++k) {
    by_column.col(columns[static_cast<std::size_t>(k)]) += weight.col(k);
    by_row.row(rows[static_cast<std::size_t>(k)]) += weight.row(k);
  }
  std::vector<std::tuple<double, int, int>> pairs;
  for (int k = 0; k < size; ++k)
    for (int r = 0; r < size; ++r) {
      const double score = by_column(r, columns[static_cast<std::size_t>(k)]) * by_row(rows[static_cast<std::size_t>(r)], k);
      if (score > 1e-8) pairs.emplace_back(-score - 1e-3 * weight(r, k), k, r);
    }
  std::sort(pairs.begin(), pairs.end());
  Labels partner(static_cast<std::size_t>(size), -1), used(static_cast<std::size_t>(size), 0);
  for (const auto& [score, k, r] : pairs) {
    if (partner[static_cast<std::size_t>(k)] >= 0 || used[static_cast<std::size_t>(r)]) continue;
    partner[static_cast<std::size_t>(k)] = r;
    used[static_cast<std::size_t>(r)] = 1;
  }
  int spare = 0;
  for (int& r : partner) {
    if (r >= 0) continue;
    while (used[static_cast<std::size_t>(spare)]) ++spare;
    r = spare;
    used[static_cast<std::size_t>(spare)] = 1;
  }
  return partner;
}

template <class Scalar>
Matrix<Scalar> polar_factor(const Matrix<Scalar>& matrix) {
  TARN_CHECK(matrix.rows() == matrix.cols());
  // Only other shapes need a QR decomposition first.
  const Eigen::JacobiSVD<Matrix<Scalar>, Eigen::NoQRPreconditioner> svd(matrix, Eigen::ComputeFullU | Eigen::ComputeFullV);
  return product<Scalar>(svd.matrixU(), svd.matrixV().adjoint());
}

/// The same, by hand for a single level.
template <class Scalar>
Matrix<Scalar> unit_factor(const Matrix<Scalar>& block) {
  if (block.size() > 1) return polar_factor<Scalar>(block);
  const double length = std::abs(block(0, 0));
  return Matrix<Scalar>::Constant(1, 1, length == 0 ? Scalar(1) : block(0, 0) / length);
}

/// The same for a matrix close to unitary, by x <- x (3 - x^dagger x)/2 (Newton and Schulz).
template <class Scalar>
Matrix<Scalar> nearby_polar_factor(const Matrix<Scalar>& matrix) {
  const Matrix<Scalar> one = Matrix<Scalar>::Identity(matrix.rows(), matrix.cols());
  Matrix<Scalar> x = matrix;
  for (int k = 0; k < 12; ++k) {
    const Matrix<Scalar> defect = one - product<Scalar>(x.adjoint(), x);
    const double size = defect.cwiseAbs().maxCoeff();
    if (size < 1e-14) return x;
    if (size > 0.5) break;
    x += 0.5 * product<Scalar>(x, defect);
  }
  return polar_factor<Scalar>(matrix);
}

/// Turns the right labels within each pair of manifolds onto the left ones: parallel transport.
template <class Scalar>
void align(Matrix<Scalar>& overlap, Matrix<Scalar>& basis, const Labels& left, const Labels& right) {
  const int stride = count_of(right);
  Labels joint(left.size());
  for (std::size_t a = 0; a < left.size(); ++a) joint[a] = left[a] * stride + right[a];
  for (const Labels& group : members(joint)) {
    if (group.empty()) continue;
    const Matrix<Scalar> turn = unit_factor<Scalar>(overlap(group, group));
    const auto size = static_cast<Eigen::Index>(group.size());
    if ((turn - Matrix<Scalar>::Identity(size, size)).cwiseAbs().maxCoeff() <= 1e-13) continue;
    const Matrix<Scalar> rows = overlap(group, Eigen::all), columns = basis(Eigen::all, group);
    overlap(group, Eigen::all) = product<Scalar>(turn.adjoint(), rows);
    basis(Eigen::all, group) = product<Scalar>(columns, turn);
  }
}

template <class Scalar>
bool is_identity(const Matrix<Scalar>& matrix) {
  return (matrix - Matrix<Scalar>::Identity(matrix.rows(), matrix.cols())).cwiseAbs().maxCoeff() < 1e-14;
}

/// The slope is taken a little inside the link: a schedule may have a kink at its end.
template <class Scalar>
Eigen::VectorXd slopes(const LevelModel<Scalar>& model, double s, const Matrix<Scalar>& vectors) {
  return (vectors.conjugate().cwiseProduct(model.slope(s, vectors))).real().colwise().sum().transpose();
}

template <class Scalar>
Eigen::VectorXd adapted(const Eigen::VectorXd& energies, const Matrix<Scalar>& basis) {
  return basis.size() == 0 ? energies : Eigen::VectorXd(basis.cwiseAbs2().transpose() * energies);
}

template <class Scalar>
void set_energies(Link<Scalar>& link, const LevelModel<Scalar>& model, const Frame<Scalar>& left, const Frame<Scalar>& right) {
  const double ds = link.s_right - link.s_left;
  const auto turned = [](const Frame<Scalar>& frame, const Matrix<Scalar>& basis) -> Matrix<Scalar> {
    if (basis.size() == 0) return frame.vectors;
    return product<Scalar>(frame.vectors, basis);
  };
  link.left_energies = adapted<Scalar>(left.energies, link.left_basis);
  link.right_energies = adapted<Scalar>(right.energies, link.right_basis);
  link.left_slopes = slopes<Scalar>(model, link.s_left + 1e-9 * ds, turned(left, link.left_basis));
  link.right_slopes = slopes<Scalar>(model, link.s_right - 1e-9 * ds, turned(right, link.right_basis));
  link.mean_energies = 0.5 * (link.left_energies + link.right_energies) + ds / 12.0 * (link.left_slopes - link.right_slopes);
}

}  // namespace

std::vector<int> manifolds(const Eigen::VectorXd& energies, double tolerance) {
  Labels order(static_cast<std::size_t>(energies.size())), ordinal(order.size());
  std::iota(order.begin(), order.end(), 0);
  std::stable_sort(order.begin(), order.end(), [&](int a, int b) { return energies[a] < energies[b]; });
  int current = 0;
  for (std::size_t k = 0; k < order.size(); ++k) {
    if (k > 0 && energies[order[k]] - energies[order[k - 1]] > tolerance) ++current;
    ordinal[static_cast<std::size_t>(order[k])] = current;
  }
  return ordinal;
}

template <class Scalar>
Link<Scalar> make_link(const LevelModel<Scalar>& model, const Frame<Scalar>& left, const Frame<Scalar>& right, double tolerance) {
  TARN_CHECK(left.energies.size() == right.energies.size());
  Link<Scalar> link;
  link.s_left = left.s;
  link.s_right = right.s;
  Matrix<Scalar> overlap = product<Scalar>(right.vectors.adjoint(), left.vectors);
  link.lost = (1.0 - overlap.cwiseAbs2().colwise().sum().array()).max(0.0).transpose();
  const Labels columns = manifolds(left.energies, tolerance), rows = manifolds(right.energies, tolerance);
  link.left_basis = adapt_columns<Scalar>(overlap, columns, rows);
  Matrix<Scalar> transposed = overlap.adjoint();
  Matrix<Scalar> basis = adapt_columns<Scalar>(transposed, rows, columns);
  overlap = transposed.adjoint();
  const Labels partner = match<Scalar>(overlap, columns, rows);
  if (basis.size() == 0) basis = Matrix<Scalar>::Identity(overlap.rows(), overlap.rows());
  basis = Matrix<Scalar>(basis(Eigen::all, partner));
  overlap = Matrix<Scalar>(overlap(partner, Eigen::all));
  Labels matched(partner.size());
  for (std::size_t a = 0; a < partner.size(); ++a) matched[a] = rows[static_cast<std::size_t>(partner[a])];
  align<Scalar>(overlap, basis, columns, matched);
  if (!is_identity<Scalar>(basis)) link.right_basis = basis;
  if (left.vectors.rows() != left.vectors.cols()) overlap = nearby_polar_factor<Scalar>(overlap);
  link.rotation = rotation_logarithm<Scalar>(overlap);
  set_energies<Scalar>(link, model, left, right);
  return link;
}

template <class Scalar>
void orient(Frame<Scalar>& right, Link<Scalar>& link) {
  if (link.right_basis.size() == 0) return;
  right.vectors = product<Scalar>(right.vectors, link.right_basis);
  right.energies = link.right_energies;
  link.right_basis.resize(0, 0);
}

template Link<double> make_link<double>(const LevelModel<double>&, const Frame<double>&, const Frame<double>&, double);
template Link<Complex> make_link<Complex>(const LevelModel<Complex>&, const Frame<Complex>&, const Frame<Complex>&, double);
template void orient<double>(Frame<double>&, Link<double>&);
template void orient<Complex>(Frame<Complex>&, Link<Complex>&);

}  // namespace tarn::runtime
