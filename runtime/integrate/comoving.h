#pragma once
/// \file Following the phase of a closed system: psi = exp(-i theta) y with theta' = <H>, so that y turns
/// with the spread of its energies only, not with their mean. Amplitudes interleaved by lanes: part c
/// (0 real, 1 imaginary) of amplitude i of lane l stands at (2 i + c) lanes + l.

#include <complex>
#include <cstddef>

namespace tarn::runtime {

/// means[l] = <y|i d|y> / <y|y> of lane l: the mean energy [rad/ns] if d = -i H y. Zero for y = 0.
void mean_energies(std::size_t length, std::size_t lanes, const double* y, const double* d, double* means);

/// d += i energies[l] y, lane by lane: takes the energy out of d = -i H y.
void add_energies(std::size_t length, std::size_t lanes, const double* energies, const double* y, double* d);

/// out = phases[l] y, lane by lane; `out` may be y.
void turn(std::size_t length, std::size_t lanes, const std::complex<double>* phases, const double* y,
          double* out);

}  // namespace tarn::runtime
