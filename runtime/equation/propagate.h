#pragma once
/// \file What every equation of motion offers to the experiment: one propagation at one local
/// tolerance. Errors of answers are the experiment's business: it compares two propagations.

#include <Eigen/Core>
#include <cstddef>
#include <functional>
#include <string>
#include <variant>

#include "lang/support/place.h"
#include "runtime/equation/timeline.h"
#include "runtime/integrate/counters.h"
#include "runtime/integrate/failure.h"

namespace tarn::runtime {

/// A state in the computational basis: amplitudes (2^n) or a density matrix (2^n x 2^n).
using Ket = Eigen::VectorXcd;
using Density = Eigen::MatrixXcd;
using State = std::variant<Ket, Density>;

/// Why a point could not be computed, in the user's terms.
struct RunError {
  std::string kind;     ///< Stable name: not_finite, step_underflow, interrupted, ...
  std::string message;
  Place place = {};         ///< Of the number at fault, where one is.
};

/// Called with the index of each requested time, ascending, and the state there. The state is
/// valid during the call only.
using Visit = std::function<void(std::size_t index, const State& state)>;

/// The largest |rho(a, b)| beside the diagonal of a Hermitian matrix, in the basis it is given in.
double largest_coherence(const Density& rho);

/// The error of a run that an integrator gave up.
RunError run_error(const Failure& failure);

}  // namespace tarn::runtime
