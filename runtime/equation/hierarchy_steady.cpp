#include "runtime/equation/hierarchy_steady.h"

#include <Eigen/Eigenvalues>
#include <cmath>
#include <fmt/format.h>
#include <optional>

namespace tarn::runtime {
namespace {

constexpr std::size_t kMostProducts = 6000;

/// A x = L x - shift trace(rho) b, b = 1/N in rho and zero elsewhere. The trace of L x being zero, A x = -shift b has
/// trace(rho) = 1 and L x = 0. Solved after division by the diagonal part of L.
class StationaryProblem {
 public:
  StationaryProblem(HierarchyEquation& hierarchy, const Eigen::MatrixXcd& h, double shift)
      : hierarchy_(hierarchy), shift_(shift), dimension_(h.rows()), levels_(h), x_(hierarchy.size()), d_(hierarchy.size()) {}

  Eigen::Index size() const { return static_cast<Eigen::Index>(hierarchy_.size()); }

  Eigen::VectorXd even() const {
    Eigen::VectorXd b = Eigen::VectorXd::Zero(size());
    for (Eigen::Index i = 0; i < dimension_; ++i) b[i * dimension_ + i] = 1.0 / static_cast<double>(dimension_);
    return b;
  }

  /// The divided residual: D^-1 (-shift b - A x) for `inhomogeneous`, else D^-1 A x.
  Eigen::VectorXd apply(const Eigen::Ref<const Eigen::VectorXd>& x, bool inhomogeneous) {
    Eigen::Map<Eigen::VectorXd>(x_.data(), size()) = x;
    hierarchy_.derivative(0, x_.data(), d_.data());
    double trace = 0;
    for (Eigen::Index i = 0; i < dimension_; ++i) trace += x[i * dimension_ + i];
    const double part = shift_ / static_cast<double>(dimension_) * (inhomogeneous ? trace - 1 : trace);
    for (Eigen::Index i = 0; i < dimension_; ++i) d_.data()[i * dimension_ + i] -= part;
    divide();
    const Eigen::Map<const Eigen::VectorXd> d(d_.data(), size());
    return inhomogeneous ? Eigen::VectorXd(-d) : Eigen::VectorXd(d);
  }

 private:
  void divide() {
    const Eigen::MatrixXcd& v = levels_.eigenvectors();
    const Eigen::VectorXd& e = levels_.eigenvalues();
    const auto stride = static_cast<std::size_t>(2 * dimension_ * dimension_);
    for (std::size_t a = 0; a < hierarchy_.indices().count; ++a) {
      Eigen::MatrixXcd block = v.adjoint() * matrix_of_block(dimension_, d_.data() + a * stride) * v;
      const std::complex<double> decay = a == 0 ? shift_ : hierarchy_.indices().decay[a];
      for (Eigen::Index i = 0; i < dimension_; ++i)
        for (Eigen::Index j = 0; j < dimension_; ++j) block(i, j) /= -decay - std::complex<double>(0, e[i] - e[j]);
      store_block(v * block * v.adjoint(), d_.data() + a * stride);
    }
  }

  HierarchyEquation& hierarchy_;
  double shift_;
  Eigen::Index dimension_;
  Eigen::SelfAdjointEigenSolver<Eigen::MatrixXcd> levels_;
  AlignedArray x_, d_;
};

/// One cycle of at most `most` products from x; returns the norm of the residual reached.
double minimise_residual(StationaryProblem& problem, Eigen::Index most, double tolerance, const Interrupted& interrupted,
                         Eigen::VectorXd& x, Counters& counters) {
  Eigen::VectorXd residual = problem.apply(x, true);
  ++counters.evaluations;
  const double start = residual.norm();
  if (!(start > tolerance)) return start;
  Eigen::MatrixXd basis(problem.size(), most + 1), triangle = Eigen::MatrixXd::Zero(most + 1, most);
  Eigen::VectorXd rest = Eigen::VectorXd::Zero(most + 1), cosines(most), sines(most);
  basis.col(0) = residual / start;
  rest[0] = start;
  Eigen::Index k = 0;
  while (k < most && std::abs(rest[k]) > tolerance && !(interrupted && interrupted())) {
    Eigen::VectorXd next = problem.apply(basis.col(k), false);
    ++counters.evaluations;
    for (int pass = 0; pass < 2; ++pass) {  // Twice is enough: rounding would spoil the orthogonality of one pass.
      const Eigen::VectorXd parts = basis.leftCols(k + 1).transpose() * next;
      next -= basis.leftCols(k + 1) * parts;
      triangle.col(k).head(k + 1) += parts;
    }
    const double length = next.norm();
    for (Eigen::Index i = 0; i < k; ++i) {
      const double a = triangle(i, k), b = triangle(i + 1, k);
      triangle(i, k) = cosines[i] * a + sines[i] * b;
      triangle(i + 1, k) = cosines[i] * b - sines[i] * a;
    }
    const double radius = std::hypot(triangle(k, k), length);
    if (!(radius > 0)) break;
    cosines[k] = triangle(k, k) / radius;
    sines[k] = length / radius;
    triangle(k, k) = radius;
    rest[k + 1] = -sines[k] * rest[k];
    rest[k] *= cosines[k];
    if (length > 0) basis.col(k + 1) = next / length;
    ++k;
  }
  if (k > 0) {
    const Eigen::VectorXd weights = triangle.topLeftCorner(k, k).triangularView<Eigen::Upper>().solve(rest.head(k));
    x += basis.leftCols(k) * weights;
  }
  return std::abs(rest[k]);
}

/// About the fastest relaxation of the state: sum |A|^2 gamma(0)/2, or a small part of the width where there is none.
double relaxation_scale(const OpenSystem& system, double s, const Eigen::MatrixXcd& h) {
  double scale = 0;
  Eigen::MatrixXcd a(system.dimension, system.dimension);
  for (std::size_t c = 0; c < system.couplings.size(); ++c) {
    system.couplings[c].at(s, a);
    std::complex<double> rate = system.baths[c].rest;
    for (const Exponential& term : system.baths[c].terms) rate += term.coefficient / term.rate;
    scale += a.squaredNorm() / static_cast<double>(system.dimension) * rate.real();
  }
  for (const Eigen::MatrixXcd& jump : system.jumps) scale += jump.squaredNorm();
  return std::max(scale, 1e-6 * (h.norm() + 1e-3));
}

}  // namespace

Result<StationaryHierarchy, RunError> stationary_hierarchy(const OpenSystem& system, int depth, double s, double tolerance,
                                                           const Interrupted& interrupted) {
  if (const auto error = too_large_hierarchy(system, depth)) return Unexpected{*error};
  HierarchyEquation hierarchy(system, depth);
  Eigen::MatrixXcd h(system.dimension, system.dimension);
  system.hamiltonian(s, 0, h);
  if (!hierarchy.prepare(0, s, 0)) return Unexpected{run_error({FailureKind::not_finite, 0})};
  StationaryProblem problem(hierarchy, h, relaxation_scale(system, s, h));
  StationaryHierarchy result;
  Eigen::VectorXd x = problem.even();
  const double wanted = 1e8 / (8.0 * static_cast<double>(problem.size()));
  const auto most = static_cast<Eigen::Index>(std::clamp(wanted, 18.0, 120.0));
  do {
    result.residual = minimise_residual(problem, most, tolerance, interrupted, x, result.counters);
    if (interrupted && interrupted()) return Unexpected{run_error({FailureKind::interrupted, 0})};
  } while (result.residual > tolerance && result.counters.evaluations < kMostProducts);
  if (!(result.residual <= tolerance))
    return Unexpected{RunError{"not_converged", fmt::format("the stationary state of the hierarchy was found to {:.1e} only: "
                                                            "begin in another state and hold for a few relaxation times",
                                                            result.residual)}};
  result.state = {depth, std::vector<double>(x.data(), x.data() + x.size())};
  result.rho = matrix_of_block(system.dimension, x.data());
  return result;
}

}  // namespace tarn::runtime
