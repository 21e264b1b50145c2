#pragma once
/// \file Davies' equation written down once more, as directly as possible: the independent
/// reference of these tests. Computational basis, dense jump
/// operators for every frequency, classical Runge-Kutta of order 4 with fixed steps.

#include "models.h"

namespace tarn::runtime::testing {

struct Brute {
  HamiltonianFamily family;
  std::vector<BathFunctions> baths;
  double tolerance = 1e-6;  ///< Frequencies closer than this coincide [rad/ns].
  std::vector<LabJump> jumps = {};
  Drive drive = {};

  static Density at(const OperatorSum& sum, const HamiltonianFamily& family, double s);

  /// d rho/dt at s and t.
  Density operator()(double s, double t, const Density& rho) const;

  /// Over one ramp or hold: `steps` and twice as many, extrapolated to order 5.
  Density run(const Segment& segment, const Density& rho, int steps) const;

 private:
  Density fixed(const Segment& segment, Density rho, int steps) const;
};

}  // namespace tarn::runtime::testing
