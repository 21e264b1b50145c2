#pragma once
/// \file Small invented systems with baths that remember, for the tests of the hierarchy and of the driven
/// second-order equation.

#include <Eigen/Core>
#include <complex>
#include <vector>

#include "runtime/equation/open_system.h"

namespace tarn::runtime::testing {

Eigen::MatrixXcd pauli(char letter);

/// The matrix of a word, the first letter the most significant.
Eigen::MatrixXcd pauli_word(const char* word);

/// J(w) = eta w / (1 + (w/cutoff)^2) at theta by the [N-1/N] Pade sum of the Bose function, `count` terms beside the pole of J.
/// Written here from J. Chem. Phys. 134, 244106 (2011), apart from the one of runtime/bath.
ExponentialSum drude_sum(double eta, double cutoff, double theta, int count);

/// One term C(t) = coefficient exp(-rate t) and, for a complex rate, its conjugate partner with `partner`.
ExponentialSum damped_mode(std::complex<double> coefficient, std::complex<double> partner, std::complex<double> rate);

/// int_0^t dt' sum, and int_0^t (t - t') sum, of the exponentials alone.
std::complex<double> first_integral(const ExponentialSum& sum, double t);
std::complex<double> second_integral(const ExponentialSum& sum, double t);

SystemCoupling constant_coupling(const Eigen::MatrixXcd& a);

/// H = -D/2 sx - eps/2 sz, noise on sz.
OpenSystem one_qubit(double tunnelling, double bias, const ExponentialSum& bath);

Timeline static_run(double duration);

/// The states at `times` of a run with the driver given, which gets the run and a Visit.
template <class Propagate>
std::vector<Density> states_at(const std::vector<double>& times, const Timeline& timeline, double tolerance,
                               const Propagate& propagate) {
  std::vector<Density> states(times.size());
  MemoryRun run;
  run.timeline = &timeline;
  run.times = times;
  run.tolerance = tolerance;
  propagate(run, Visit([&](std::size_t k, const State& state) { states[k] = std::get<Density>(state); }));
  return states;
}

/// The states of a hierarchy; fails the test if the run failed.
std::vector<Density> hierarchy_states(const OpenSystem& system, int depth, const Timeline& timeline, const Density& initial,
                                      const std::vector<double>& times, double tolerance = 1e-10);

}  // namespace tarn::runtime::testing
