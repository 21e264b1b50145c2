#pragma once
/// \file Exponentials of small dense generators, for long times in which nothing changes.

#include <Eigen/Core>

namespace tarn::runtime {

/// G = V diag(-i e) V^dagger, for a skew-Hermitian G.
struct SkewSpectrum {
  Eigen::VectorXd e;
  Eigen::MatrixXcd v;
};

/// Takes the Hermitian part of i G; what G has beside it is rounding.
SkewSpectrum skew_spectrum(const Eigen::MatrixXcd& g);

/// exp(t G) x. The error is rounding: about |e| t 1e-16 in the phases.
Eigen::VectorXcd evolve(const SkewSpectrum& g, double t, const Eigen::VectorXcd& x);

/// exp(t G) of any square matrix, by scaling and squaring of Pade approximants (Eigen 3.4).
/// The error is rounding times the number of squarings: about |G| t 1e-16 for a contraction.
Eigen::MatrixXcd dense_exponential(const Eigen::MatrixXcd& g, double t);

}  // namespace tarn::runtime
