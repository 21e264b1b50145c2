#include "runtime/linear/general.h"

#include <Eigen/Eigenvalues>
#include <Eigen/LU>

namespace tarn::runtime {
namespace {

constexpr double kSingular = 1e-13, kDefective = 1e-12;

}  // namespace

std::optional<GeneralEigensystem> general_eigensystem(const Eigen::MatrixXcd& matrix) {
  if (!matrix.allFinite()) return std::nullopt;
  const Eigen::ComplexEigenSolver<Eigen::MatrixXcd> solver(matrix);
  if (solver.info() != Eigen::Success) return std::nullopt;
  const Eigen::PartialPivLU<Eigen::MatrixXcd> lu(solver.eigenvectors());
  if (!(lu.rcond() > kDefective)) return std::nullopt;
  return GeneralEigensystem{solver.eigenvalues(), solver.eigenvectors(), lu.inverse()};
}

std::optional<Eigen::VectorXcd> solve(const Eigen::MatrixXcd& matrix, const Eigen::VectorXcd& b) {
  if (!matrix.allFinite()) return std::nullopt;
  const Eigen::PartialPivLU<Eigen::MatrixXcd> lu(matrix);
  if (!(lu.rcond() > kSingular)) return std::nullopt;
  return lu.solve(b);
}

}  // namespace tarn::runtime
