#pragma once
/// \file Generators of the fast-noise equations at one s, as operators in the basis of the model.
///
///   d rho/dt = X + X^dagger,   X = (-iH + drift) rho + sum_j left_j rho right_j^dagger.
///
/// All come from one form: with A the coupling in the basis of the levels, w_nm = E_m - E_n,
///   d rho_ij/dt = ... + sum_kl A_ik A*_jl c(w_ik, w_jl) rho_kl - (K rho + rho K^dagger)_ij,
///   K_nm = sum_k A*_kn A_km [c(w_km, w_kn)/2 + i S(w_km, w_kn)],
/// in which an equation is its c and S: Redfield c = Gamma(w) + Gamma(w')*, S = [Gamma(w) - Gamma(w')*]/2i (IBM J. Res.
/// Dev. 1, 19 (1957)); coarse-grained and universal by the pair functions of runtime/bath (Phys. Rev. A 88,
/// 012103 (2013); Quantum 4, 227 (2020); Phys. Rev. B 102, 115109 (2020)).

#include <Eigen/Core>
#include <complex>
#include <functional>
#include <memory>
#include <span>
#include <vector>

#include "runtime/bath/pair_function.h"
#include "runtime/levels/family.h"

namespace tarn::runtime {

/// Fills out[k] with Gamma(w[k]) = int_0^inf dt exp(i w t) C(t) = gamma/2 + i S [rad/ns]; pure.
using HalfRangeFunction = std::function<void(std::span<const double> w, std::complex<double>* out)>;

/// Likewise with Gamma_t(w) = int_0^t: what the bath of a system has come to know since the start at t = 0 [ns].
using GrowingFunction = std::function<void(double t, std::span<const double> w, std::complex<double>* out)>;

/// What the bath of one coupling is to an equation: one of the three is there.
struct FastBath {
  HalfRangeFunction half_range;               ///< Redfield.
  GrowingFunction growing;                    ///< Redfield with coefficients integrated up to t.
  std::shared_ptr<const PairFunctions> pair;  ///< Equations of Lindblad form.
};

struct OperatorForm {
  Eigen::MatrixXcd drift;
  std::vector<Eigen::MatrixXcd> left;
  std::vector<Eigen::MatrixXcd> right;  ///< Empty: those of `left`. Then the form is completely positive.
};

/// One bath for every coupling of the model, all independent. `shift`: with the Lamb shift. `t`: for growing
/// coefficients.
template <class Scalar>
OperatorForm redfield_form(const LevelModel<Scalar>& model, const Frame<Scalar>& frame, std::span<const FastBath> baths,
                           bool shift, double t = 0);

/// -i H_LS - sum_j L_j^dagger L_j / 2 is the drift, L_j/sqrt(2) stand on the left.
template <class Scalar>
OperatorForm lindblad_form(const LevelModel<Scalar>& model, const Frame<Scalar>& frame, std::span<const FastBath> baths,
                           bool shift);

}  // namespace tarn::runtime
