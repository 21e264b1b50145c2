#pragma once
/// \file The equations of motion that a text may name, and what each of them takes.

#include <array>
#include <cstdint>
#include <string_view>

namespace tarn {

enum class EquationKind : std::uint8_t { none, schroedinger, lindblad, davies, redfield, coarse_grained, universal, hierarchy };
/// Of redfield: coefficients in the limit of long times, integrated up to t, or driven with the anneal.
enum class MemoryI : std::uint8_t { markov, growing, driven };

constexpr std::string_view word_of(EquationKind kind) {
  constexpr auto kWords = std::to_array<std::string_view>(
      {"none", "schroedinger", "lindblad", "davies", "redfield", "coarse_grained", "universal", "hierarchy"});
  return kWords[static_cast<std::size_t>(kind)];
}

constexpr bool takes_noise(EquationKind kind) { return kind >= EquationKind::davies; }
constexpr bool takes_jumps(EquationKind kind) { return kind >= EquationKind::lindblad; }

/// Those that may keep the lowest levels only.
constexpr bool takes_levels(EquationKind kind) { return kind >= EquationKind::davies && kind <= EquationKind::universal; }

/// Those whose propagation is completely positive, so that it is a mean over state vectors with jumps.
constexpr bool takes_trajectories(EquationKind kind) { return takes_levels(kind) && kind != EquationKind::redfield; }

}  // namespace tarn
