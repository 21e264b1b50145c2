#include "runtime/equation/hierarchy_blocks.h"

#include "lang/support/check.h"

namespace tarn::runtime {
namespace {

using Complex = std::complex<double>;

AlignedArray plane(const Eigen::MatrixXd& x) {
  AlignedArray out(static_cast<std::size_t>(x.size()));
  for (Eigen::Index i = 0; i < x.rows(); ++i)
    for (Eigen::Index j = 0; j < x.cols(); ++j) out.data()[i * x.cols() + j] = x(i, j);
  return out;
}

HierarchyCoupling coupling_of(const Eigen::MatrixXcd& a) {
  HierarchyCoupling coupling;
  coupling.diagonal = (a - Eigen::MatrixXcd(a.diagonal().asDiagonal())).cwiseAbs().maxCoeff() == 0;
  if (!coupling.diagonal) {
    coupling.matrix = hierarchy_block(a);
    return coupling;
  }
  const Eigen::VectorXd values = a.diagonal().real();
  const Eigen::MatrixXd rows = values.replicate(1, a.cols());
  coupling.differences = plane(rows - rows.transpose());
  coupling.sums = plane(rows + rows.transpose());
  return coupling;
}

}  // namespace

void store_block(const Eigen::MatrixXcd& x, double* block) {
  for (Eigen::Index i = 0; i < x.rows(); ++i)
    for (Eigen::Index j = 0; j < x.cols(); ++j) {
      block[i * x.cols() + j] = x(i, j).real();
      block[x.size() + i * x.cols() + j] = x(i, j).imag();
    }
}

AlignedArray hierarchy_block(const Eigen::MatrixXcd& x) {
  AlignedArray block(static_cast<std::size_t>(2 * x.size()));
  store_block(x, block.data());
  return block;
}

Eigen::MatrixXcd matrix_of_block(Eigen::Index dimension, const double* block) {
  Eigen::MatrixXcd x(dimension, dimension);
  for (Eigen::Index i = 0; i < dimension; ++i)
    for (Eigen::Index j = 0; j < dimension; ++j)
      x(i, j) = {block[i * dimension + j], block[dimension * dimension + i * dimension + j]};
  return x;
}

void set_operators(const Eigen::MatrixXcd& h, const std::vector<Eigen::MatrixXcd>& couplings, const std::vector<double>& rests,
                   const std::vector<Eigen::MatrixXcd>& jumps, HierarchyOperators& operators) {
  Eigen::MatrixXcd decay = Eigen::MatrixXcd::Zero(h.rows(), h.cols());
  Eigen::MatrixXd white = Eigen::MatrixXd::Zero(h.rows(), h.cols());
  operators.sandwiches.clear();
  operators.couplings.clear();
  for (const Eigen::MatrixXcd& jump : jumps) {
    decay += jump.adjoint() * jump / 2;
    operators.sandwiches.push_back({hierarchy_block(jump), hierarchy_block(jump.adjoint())});
  }
  for (std::size_t c = 0; c < couplings.size(); ++c) {
    const Eigen::MatrixXcd& a = couplings[c];
    operators.couplings.push_back(coupling_of(a));
    if (rests[c] == 0) continue;
    if (operators.couplings.back().diagonal) {
      const Eigen::MatrixXd rows = a.diagonal().real().replicate(1, a.cols());
      white += rests[c] * (rows - rows.transpose()).cwiseAbs2();
    } else {  // -rest [A, [A, x]]
      decay += rests[c] * a * a;
      operators.sandwiches.push_back({hierarchy_block(2 * rests[c] * a), hierarchy_block(a)});
    }
  }
  const Eigen::MatrixXcd left = Complex(0, -1) * h - decay;
  operators.left = hierarchy_block(left);
  operators.right = hierarchy_block(left.adjoint());
  operators.white = plane(white);
}

}  // namespace tarn::runtime
