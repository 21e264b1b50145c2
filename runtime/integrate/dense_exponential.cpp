#include "runtime/integrate/dense_exponential.h"

#include <Eigen/Eigenvalues>
#include <complex>
#include <unsupported/Eigen/MatrixFunctions>

namespace tarn::runtime {

SkewSpectrum skew_spectrum(const Eigen::MatrixXcd& g) {
  const Eigen::MatrixXcd h = std::complex<double>(0, 0.5) * (g - g.adjoint());
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXcd> solver(h);
  return {solver.eigenvalues(), solver.eigenvectors()};
}

Eigen::VectorXcd evolve(const SkewSpectrum& g, double t, const Eigen::VectorXcd& x) {
  const Eigen::ArrayXcd phases = (std::complex<double>(0, -t) * g.e.array()).exp();
  return g.v * (phases * (g.v.adjoint() * x).array()).matrix();
}

Eigen::MatrixXcd dense_exponential(const Eigen::MatrixXcd& g, double t) { return (t * g).exp(); }

}  // namespace tarn::runtime
