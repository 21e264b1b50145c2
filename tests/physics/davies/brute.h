#pragma once
/// \file Davies' equation written down once more, as directly as possible: the independent
/// reference of these tests. Computational basis, dense jump
/// operators for every frequency, classical Runge-Kutta of order 4 with fixed steps.

#include <Eigen/Dense>
#include <algorithm>

#include "models.h"

namespace tarn::runtime::testing {

struct Brute {
  HamiltonianFamily family;
  std::vector<BathFunctions> baths;
  double tolerance = 1e-6;  ///< Frequencies closer than this coincide [rad/ns].
  std::vector<LabJump> jumps = {};
  Drive drive = {};

  static Density at(const OperatorSum& sum, const HamiltonianFamily& family, double s) {
    std::vector<double> row(family.rows);
    family.coefficients({&s, 1}, row.data());
    const Eigen::Index size = Eigen::Index{1} << family.qubits;
    Density total = Density::Zero(size, size);
    for (const auto& group : sum.groups) total += row[group.coefficient] * dense_matrix<std::complex<double>>(group.terms, family.qubits);
    return total;
  }

  static double value(const SpectralFunction& function, double w) {
    double out = 0;
    if (function) function({&w, 1}, &out);
    return out;
  }

  /// d rho/dt at s and t.
  Density operator()(double s, double t, const Density& rho) const {
    const std::complex<double> i(0, 1);
    const Eigen::SelfAdjointEigenSolver<Density> eigen(at(family.hamiltonian, family, s));
    const Density& v = eigen.eigenvectors();
    const Eigen::VectorXd& e = eigen.eigenvalues();
    Density h = at(family.hamiltonian, family, s), out = Density::Zero(rho.rows(), rho.cols());
    if (drive) h += drive(t);
    std::vector<double> frequencies;
    for (Eigen::Index n = 0; n < e.size(); ++n)
      for (Eigen::Index m = 0; m < e.size(); ++m) frequencies.push_back(e[m] - e[n]);
    std::sort(frequencies.begin(), frequencies.end());
    for (std::size_t c = 0; c < family.couplings.size(); ++c) {
      const Density a = v.adjoint() * at(family.couplings[c], family, s) * v;
      for (std::size_t k = 0, last = 0; k < frequencies.size(); k = last) {
        double mean = 0;
        for (last = k; last < frequencies.size() && (last == k || frequencies[last] - frequencies[last - 1] <= tolerance); ++last)
          mean += frequencies[last];
        mean /= static_cast<double>(last - k);
        Density jump = Density::Zero(a.rows(), a.cols());
        for (Eigen::Index n = 0; n < e.size(); ++n)
          for (Eigen::Index m = 0; m < e.size(); ++m)
            if (e[m] - e[n] >= frequencies[k] && e[m] - e[n] <= frequencies[last - 1]) jump(n, m) = a(n, m);
        jump = v * jump * v.adjoint();
        const Density square = jump.adjoint() * jump;
        out += value(baths[c].rate, mean) * (jump * rho * jump.adjoint() - 0.5 * (square * rho + rho * square));
        h += value(baths[c].shift, mean) * square;
      }
    }
    for (const LabJump& jump : jumps) {
      const Density square = jump.op.adjoint() * jump.op;
      out += jump.rate * (jump.op * rho * jump.op.adjoint() - 0.5 * (square * rho + rho * square));
    }
    return out - i * (h * rho - rho * h);
  }

  /// Over one ramp or hold: `steps` and twice as many, extrapolated to order 5.
  Density run(const Segment& segment, const Density& rho, int steps) const {
    return (16.0 * fixed(segment, rho, 2 * steps) - fixed(segment, rho, steps)) / 15.0;
  }

  Density fixed(const Segment& segment, Density rho, int steps) const {
    const double h = (segment.t1 - segment.t0) / steps;
    // Where levels meet at an end of a ramp, more frequencies coincide there than anywhere inside:
    // a single moment, which must not weigh as much as a stage of the integrator.
    const auto slope = [&](double time, const Density& state) {
      const double t = std::clamp(time, segment.t0 + 0.01 * h, segment.t1 - 0.01 * h);
      return (*this)(segment.s0 + (segment.s1 - segment.s0) * (t - segment.t0) / (segment.t1 - segment.t0), t, state);
    };
    for (int k = 0; k < steps; ++k) {
      const double t = segment.t0 + k * h;
      const Density k1 = slope(t, rho), k2 = slope(t + h / 2, rho + h / 2 * k1);
      const Density k3 = slope(t + h / 2, rho + h / 2 * k2), k4 = slope(t + h, rho + h * k3);
      rho += h / 6 * (k1 + 2 * k2 + 2 * k3 + k4);
    }
    return rho;
  }
};

}  // namespace tarn::runtime::testing
