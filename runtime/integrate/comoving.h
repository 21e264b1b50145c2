#pragma once
/// \file Following the phase of a closed system: psi = exp(-i theta) y with theta' = <H>, so that y turns
/// with the spread of its energies only, not with their mean. Amplitudes interleaved by lanes: part c
/// (0 real, 1 imaginary) of amplitude i of lane l stands at (2 i + c) lanes + l.

#include <complex>
#include <cstddef>

#include "runtime/integrate/packs.h"

namespace tarn::runtime {

/// i f_l y for fixed factors f_l, worked out for arrays of `lanes` interleaved vectors.
struct TurnWeights {
  using Index = long long __attribute__((vector_size(kPackWidth * sizeof(long long))));
  Index partner[2];  ///< Where element k of two neighbouring packs finds its other part.
  Pack factors[2];   ///< -f at real parts, f at imaginary ones.
};
TurnWeights turn_weights(std::size_t lanes, const double* factors);

/// means[l] = <y|i d|y> / <y|y> of lane l: the mean energy [rad/ns] if d = -i H y. Zero for y = 0.
void mean_energies(std::size_t length, std::size_t lanes, const double* y, const double* d, double* means);

/// d += i f_l y, lane by lane: with f the energies, takes them out of d = -i H y.
void add_turned(std::size_t length, const TurnWeights& weights, const double* y, double* d);

/// out = phases[l] y, lane by lane; `out` may be y.
void turn(std::size_t length, std::size_t lanes, const std::complex<double>* phases, const double* y,
          double* out);

}  // namespace tarn::runtime
