#pragma once
/// \file The functions c(w, w') and S(w, w') of the equations that are completely positive, in low-rank form.
///
///   d rho_ij/dt = -i(E_i - E_j) rho_ij + sum_kl A_ik A*_jl c(w_ik, w_jl) rho_kl - (K rho + rho K^dagger)_ij,
///   K_nm = sum_k A*_kn A_km [c(w_km, w_kn)/2 + i S(w_km, w_kn)],   w_nm = E_m - E_n.
///
/// Both are symmetric and real, sum_q value_q u_q(w) u_q(w'): each q of c is one jump operator
/// sqrt(value_q) u_q(w_nm) A_nm, each q of S one term of the Lamb shift.

#include <Eigen/Core>
#include <functional>
#include <span>
#include <vector>

#include "runtime/bath/thermal_bath.h"

namespace tarn::runtime {

class PairFunction {
 public:
  /// Zero everywhere, rank 0.
  PairFunction() = default;

  /// By interpolation. `edges` ascending, edges.size() - 1 panels of `nodes` = table.rows()/panels first-kind
  /// Chebyshev nodes each, panel after panel; a row of `table` has all u_q at a node.
  PairFunction(std::vector<double> edges, Eigen::MatrixXd table, Eigen::VectorXd values);

  /// Rank one and exact: u(w) = factor(w), value 1.
  explicit PairFunction(std::function<Eigen::ArrayXd(const Eigen::ArrayXd&)> factor);

  Eigen::Index rank() const { return values_.size(); }
  /// Largest size first; in c all are positive [rad/ns].
  const Eigen::VectorXd& values() const { return values_; }
  /// Shape: (w.size(), rank). |w| up to the W of the making, and what rounding adds.
  Eigen::MatrixXd factors(std::span<const double> w) const;
  /// One value, for tests: some microseconds.
  double operator()(double w, double other) const;
  /// Estimate of the largest error on [-W, W]^2 [rad/ns].
  double error() const { return error_; }
  void set_error(double error) { error_ = error; }

 private:
  using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;

  std::function<Eigen::ArrayXd(const Eigen::ArrayXd&)> exact_;
  std::vector<double> edges_;
  RowMajor table_;
  Eigen::VectorXd node_;         ///< On [-1, 1].
  Eigen::VectorXd barycentric_;  ///< Their weights.
  Eigen::VectorXd values_;
  double error_ = 0.0;
};

struct PairFunctions {
  PairFunction rate;   ///< c
  PairFunction shift;  ///< S
};

/// Coarse-grained over `window` Ta > 0 [ns]: c = 2 Re G, S = Im G on [-W, W]^2, W > 0 [rad/ns],
///   G(w, w') = (1/Ta) int_0^Ta dx C(x) exp(i(w + w')x/2) 2 sin[(w' - w)(Ta - x)/2]/(w' - w)
///            = [exp(i d Ta/2) Gamma_Ta(w) - exp(-i d Ta/2) Gamma_Ta(w')]/(i d Ta),   d = w' - w,
/// Gamma_Ta as in half_range.h: one transform at some W Ta/2 frequencies gives both parts, for any bath and
/// temperature, because G is band-limited in w however sharp the spectrum is. The rank is near W Ta/pi + 20;
/// cost grows as its cube.
/// Source: Phys. Rev. A 78, 022106 (2008); Phys. Rev. A 88, 012103 (2013); Quantum 4, 227 (2020).
PairFunctions averaged_pair(const ThermalBath& bath, double window, double w_max);

/// Universal: c(w, w') = sqrt(gamma(w) gamma(w')), exact, and S(w, w') = f(w', w) on [-W, W]^2, symmetric,
///   f(a, b) = -(1/2 pi) P int dx/x sqrt(gamma(x + a) gamma(x + b)),   f(w, w) = S(w).
/// gamma(0) must be finite. Where gamma has kinks (an exponential cut-off has one at w = 0) f has
/// logarithmic ones: panels are graded to them.
/// Source: Phys. Rev. B 102, 115109 (2020).
PairFunctions root_pair(const ThermalBath& bath, double w_max);

}  // namespace tarn::runtime
