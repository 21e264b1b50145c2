#pragma once
/// \file Small invented chips and baths for the tests of Davies' equation.

#include <algorithm>
#include <cmath>
#include <complex>
#include <cstdint>
#include <functional>
#include <memory>
#include <numbers>
#include <random>
#include <span>
#include <vector>

#include "runtime/equation/davies_refinement.h"
#include "runtime/levels/family.h"

namespace tarn::runtime::testing {

constexpr double kTwoPi = 2 * std::numbers::pi;
constexpr double kTheta = 1.96;  ///< 15 mK in rad/ns.

inline PauliWord word_x(int qubits, int q) { return {std::uint64_t{1} << (qubits - 1 - q), 0}; }
inline PauliWord word_z(int qubits, int q) { return {0, std::uint64_t{1} << (qubits - 1 - q)}; }
inline PauliWord word_zz(int qubits, int p, int q) { return {0, word_z(qubits, p).z | word_z(qubits, q).z}; }
inline PauliWord word_y(int qubits, int q) { return {word_x(qubits, q).x, word_z(qubits, q).z}; }

/// Rows: 0 transverse amplitude A(s), 1 longitudinal amplitude B(s), 2 the constant 1.
struct Schedules {
  std::function<double(double)> a, da, b, db;
};

/// A = 2 pi 6 (1-s)^2, B = 2 pi 9 s, in rad/ns.
inline Schedules usual_schedules() {
  return {[](double s) { return kTwoPi * 6 * (1 - s) * (1 - s); }, [](double s) { return -kTwoPi * 12 * (1 - s); },
          [](double s) { return kTwoPi * 9 * s; }, [](double) { return kTwoPi * 9; }};
}

inline Schedules constant_schedules(double a, double b) {
  return {[a](double) { return a; }, [](double) { return 0.0; }, [b](double) { return b; }, [](double) { return 0.0; }};
}

struct Bond {
  int p, q;
  double j;
};

/// H = -A/2 sum g_i X_i + B/2 (sum h_i Z_i + sum J Z Z); noise Z on every qubit.
inline HamiltonianFamily ising(int qubits, const Schedules& schedules, const std::vector<double>& h, const std::vector<Bond>& bonds,
                               const std::vector<double>& g = {}) {
  HamiltonianFamily family;
  family.qubits = qubits;
  family.rows = 3;
  OperatorGroup transverse{0, {}}, longitudinal{1, {}};
  for (int i = 0; i < qubits; ++i) {
    const auto at = static_cast<std::size_t>(i);
    transverse.terms.push_back({-0.5 * (g.empty() ? 1.0 : g[at]), word_x(qubits, i)});
    if (h[at] != 0) longitudinal.terms.push_back({0.5 * h[at], word_z(qubits, i)});
    family.couplings.push_back({{{2, {{1.0, word_z(qubits, i)}}}}});
  }
  for (const Bond& bond : bonds) longitudinal.terms.push_back({0.5 * bond.j, word_zz(qubits, bond.p, bond.q)});
  family.hamiltonian.groups = {transverse, longitudinal};
  family.coefficients = [schedules](std::span<const double> s, double* out) {
    for (std::size_t k = 0; k < s.size(); ++k) {
      out[k] = schedules.a(s[k]);
      out[s.size() + k] = schedules.b(s[k]);
      out[2 * s.size() + k] = 1;
    }
  };
  family.derivative = [schedules](std::span<const double> s, double* out) {
    for (std::size_t k = 0; k < s.size(); ++k) {
      out[k] = schedules.da(s[k]);
      out[s.size() + k] = schedules.db(s[k]);
      out[2 * s.size() + k] = 0;
    }
  };
  return family;
}

/// Ring with ferromagnetic bonds -1 but the last, which is +1.
inline HamiltonianFamily frustrated_ring(int qubits) {
  std::vector<Bond> bonds;
  for (int i = 0; i + 1 < qubits; ++i) bonds.push_back({i, i + 1, -1.0});
  bonds.push_back({qubits - 1, 0, 1.0});
  return ising(qubits, usual_schedules(), std::vector<double>(static_cast<std::size_t>(qubits), 0.0), bonds);
}

inline HamiltonianFamily random_chip(int qubits, unsigned seed, const Schedules& schedules) {
  std::mt19937 engine(seed);
  std::uniform_real_distribution<double> uniform(-1, 1);
  std::vector<double> h, g;
  std::vector<Bond> bonds;
  for (int i = 0; i < qubits; ++i) {
    h.push_back(0.4 * uniform(engine));
    g.push_back(1 + 0.2 * uniform(engine));
  }
  for (int i = 0; i < qubits; ++i)
    for (int j = i + 1; j < qubits; ++j) bonds.push_back({i, j, uniform(engine)});
  return ising(qubits, schedules, h, bonds, g);
}

/// gamma of J = eta w exp(-|w|/cutoff) at theta = k_B T/hbar: 2 pi J/(1 - exp(-w/theta)).
inline SpectralFunction ohmic_rate(double eta, double cutoff, double theta) {
  return [=](std::span<const double> w, double* out) {
    for (std::size_t k = 0; k < w.size(); ++k) {
      const double x = w[k] / theta;
      const double occupied = std::abs(x) < 1e-8 ? theta * (1 + x / 2) : -w[k] / std::expm1(-x);
      out[k] = kTwoPi * eta * occupied * std::exp(-std::abs(w[k]) / cutoff);
    }
  };
}

/// Some smooth S(w): the equation takes any.
inline SpectralFunction smooth_shift(double eta, double cutoff) {
  return [=](std::span<const double> w, double* out) {
    for (std::size_t k = 0; k < w.size(); ++k) out[k] = -eta * cutoff / (1 + std::exp(-w[k] / cutoff)) + eta * std::atan(w[k]);
  };
}

inline std::vector<BathFunctions> same_baths(std::size_t count, const BathFunctions& bath) { return std::vector<BathFunctions>(count, bath); }

inline Density projector(const Eigen::VectorXcd& state) { return state * state.adjoint(); }

template <class Scalar>
Density ground_state(const Track<Scalar>& track, double s) {
  return projector(track.at(s).vectors.col(0).template cast<std::complex<double>>());
}

inline Timeline ramp(double duration, double s0 = 0, double s1 = 1) { return {{{0, duration, s0, s1}}, s0, s1}; }

/// What refinement to a tolerance gave, with its own word on the error.
struct Refined {
  std::vector<Density> states;
  double error = 0;        ///< Of populations in the computational basis.
  double state_error = 0;  ///< Of the state: Frobenius norm.
  double leakage = 0;
  bool converged = false;
};

/// Refines until the populations are good to the tolerance, or until nothing more can be done.
template <class Scalar>
Result<Refined, RunError> refine_to(double tolerance, const DaviesTables<Scalar>& tables, const DaviesRun& run) {
  DaviesRefinement<Scalar> refinement(tables, run, {});
  for (;;) {
    auto answer = refinement.next();
    if (!answer) return Unexpected{answer.error()};
    Refined refined{std::move(answer->states), 0, 0, answer->leakage, false};
    for (const CoarserStates& coarser : answer->coarser)
      for (std::size_t k = 0; k < refined.states.size(); ++k) {
        const Density off = coarser.weight * (coarser.states[k] - refined.states[k]);
        refined.error = std::max(refined.error, off.diagonal().cwiseAbs().maxCoeff());
        refined.state_error = std::max(refined.state_error, off.norm());
      }
    const double floor = answer->floor.empty() ? 0.0 : *std::max_element(answer->floor.begin(), answer->floor.end());
    refined.error += floor;
    refined.state_error += floor;
    refined.converged = refined.error <= tolerance;
    if (refined.converged || refinement.exhausted()) return refined;
  }
}

}  // namespace tarn::runtime::testing
