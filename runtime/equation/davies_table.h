#pragma once
/// \file The Davies generator at one frame, in the basis of its levels.
///
///   d rho/dt = -i [H + H_LS, rho] + sum_groups gamma(w) (A_w rho A_w^dagger - {A_w^dagger A_w, rho}/2),
///   H_LS = sum_groups S(w) A_w^dagger A_w,   A_w = sum over the group's pairs of |n><n|A|m><m|,
/// with w = E_m - E_n, one gamma and S a group (its mean frequency).
/// Source: Commun. Math. Phys. 39, 91 (1974); in instantaneous levels: New J. Phys. 14, 123016 (2012).

#include <Eigen/Core>
#include <complex>
#include <cstdint>
#include <functional>
#include <span>
#include <vector>

#include "runtime/levels/track.h"

namespace tarn::runtime {

/// Fills out[k] for every w[k] [rad/ns]; pure, safe to call from several threads.
using SpectralFunction = std::function<void(std::span<const double> w, double* out)>;

/// What one coupling feels. `shift` may be empty: the Lamb shift is then left out.
struct BathFunctions {
  SpectralFunction rate;   ///< gamma(w) >= 0, 1/ns; positive w: the system loses energy.
  SpectralFunction shift;  ///< S(w), rad/ns.
  int alike = -1;          ///< Couplings of one number >= 0 have baths that are copies of each other.
};

/// Everything but -i [H, .]: a sparse map on the K x K matrix, pair (a, b) numbered a + K b.
struct DaviesTable {
  struct Term {
    std::uint32_t target, source;  ///< Positions in `coupled`.
    std::complex<double> value;
  };
  Eigen::VectorXd shift;   ///< <a|H_LS|a>, rad/ns, trace removed.
  Eigen::MatrixXcd loss;   ///< Diagonal of the map without -i (shift_a - shift_b), 1/ns.
  std::vector<std::uint32_t> coupled;  ///< Pairs that other pairs feed or drain.
  std::vector<Term> terms;             ///< Off-diagonal part, targets ascending.
  double bound = 0;                    ///< Largest absolute row sum over the coupled pairs, 1/ns.
  Eigen::VectorXd outflow;             ///< Bound on the rate from level a out of the levels kept, 1/ns.
};

/// One bath for every coupling of the model. Baths are independent.
template <class Scalar>
DaviesTable davies_table(const LevelModel<Scalar>& model, const Frame<Scalar>& frame,
                         const FrequencyGroups& groups, std::span<const BathFunctions> baths);

/// Adds the map, shifts included, of `rho` to `out` (both K x K).
void add_dissipator(const DaviesTable& table, const Eigen::MatrixXcd& rho, Eigen::MatrixXcd& out);

/// rho <- exp(duration map) rho without the shifts of `shift`, to rounding. `rho` stays Hermitian.
void relax(const DaviesTable& table, double duration, Eigen::MatrixXcd& rho);

}  // namespace tarn::runtime
