#include "runtime/integrate/dense_exponential.h"

#include <complex>
#include <utility>
#include <unsupported/Eigen/MatrixFunctions>

#include "runtime/linear/eigensystem.h"

namespace tarn::runtime {

SkewSpectrum skew_spectrum(const Eigen::MatrixXcd& g) {
  const Eigen::MatrixXcd h = std::complex<double>(0, 0.5) * (g - g.adjoint());
  auto system = eigensystem(h);
  return {std::move(system.values), std::move(system.vectors)};
}

Eigen::VectorXcd evolve(const SkewSpectrum& g, double t, const Eigen::VectorXcd& x) {
  const Eigen::ArrayXcd phases = (std::complex<double>(0, -t) * g.e.array()).exp();
  return g.v * (phases * (g.v.adjoint() * x).array()).matrix();
}

Eigen::MatrixXcd dense_exponential(const Eigen::MatrixXcd& g, double t) { return (t * g).exp(); }

}  // namespace tarn::runtime
