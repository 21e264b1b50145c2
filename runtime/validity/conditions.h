#pragma once
/// \file The conditions under which each equation holds: one table, for the judge and for whoever prints it.

#include <array>
#include <cstdint>
#include <string_view>

#include "runtime/plan/plan.h"

namespace tarn::runtime {

enum class ConditionKind : std::uint8_t {
  bath_memory, drive_over_memory, secular, window_memory, window_relaxation, window_heating, drive_over_window, leakage
};

struct Condition {
  ConditionKind kind;
  std::string_view name;       ///< As a column of results is named; one of a name for each equation.
  std::uint32_t equations;     ///< One bit for each Equation.
  double weight;               ///< The ratio is `weight` times `measure`.
  std::string_view measure;    ///< What is divided by what.
  std::string_view meaning;
  std::string_view source;     ///< Of the measure; weights come from the calibration.
};

constexpr std::uint32_t bit(Equation equation) { return std::uint32_t{1} << static_cast<unsigned>(equation); }

inline constexpr std::uint32_t kFastEquations =
    bit(Equation::redfield) | bit(Equation::davies) | bit(Equation::coarse_grained) | bit(Equation::universal);

/// A ratio below kWithin is within, below kMarginal marginal. Common practice, no source.
inline constexpr double kWithin = 0.1, kMarginal = 0.5;

/// Calibrated so that of the runs called within 95 in 100 have all populations (of basis states and of levels, at eight
/// times or in the stationary state) off by less than 0.02. Measured by tests/bench/validity_calibration.cpp on 320
/// random chips of one (two thirds) and two qubits, standing or ramped over 0.3 to 20 ns, eta from 1e-5 to 0.2, Drude
/// or Ohmic, 5 to 46 mK. 282 had an exact answer, good to 2e-3; the hierarchy of the others (of two qubits, or with eta
/// above 0.05) took longer than 12 to 15 s. Runs, and how many of them were off by less than 0.02:
///                    within            marginal          outside
///   redfield        165, 100.0 %       79, 69.6 %        38, 18.4 %
///   davies          166,  97.6 %       67, 67.2 %        49, 51.0 %
///   coarse_grained   64, 100.0 %       90, 72.2 %       128, 43.8 %
///   universal       197,  98.5 %       71, 67.6 %        14, 35.7 %
/// Weights were chosen on the first 200 (the secular one on all); the other 120 alone passed as well. With all weights 1
/// and no condition on heating the first 200 gave 92.6 % (redfield), 96.6, 89.3 (coarse_grained), 97.8: Redfield is
/// less accurate in populations than its order says, and a window heats by more than tau_B/T_a tells.
inline constexpr std::array kConditions{
    Condition{ConditionKind::bath_memory, "bath memory", bit(Equation::redfield), 4, "tau_B/tau_SB, summed over the noise operators",
              "a bath forgets long before it has changed the state: second order in the coupling is enough",
              "Quantum 4, 227 (2020), leading dependence"},
    Condition{ConditionKind::bath_memory, "bath memory", bit(Equation::davies) | bit(Equation::universal), 2,
              "tau_B/tau_SB, summed over the noise operators",
              "a bath forgets long before it has changed the state: second order in the coupling is enough",
              "Quantum 4, 227 (2020), leading dependence"},
    Condition{ConditionKind::drive_over_memory, "drive over memory",
              bit(Equation::redfield) | bit(Equation::davies) | bit(Equation::universal), 1, "|dH/dt| tau_B^2",
              "the levels stand still while a bath remembers; redfield(memory = driven) does not ask for it",
              "common practice, no source"},
    Condition{ConditionKind::secular, "secular", bit(Equation::davies), 2,
              "the largest sqrt(gamma gamma') |A A'| / |w - w'| over pairs of jumps that are taken apart",
              "frequencies are spaced wide against the rates, so that jumps at different ones do not interfere",
              "Commun. Math. Phys. 39, 91 (1974): the limit in which it vanishes"},
    Condition{ConditionKind::window_memory, "memory in window", bit(Equation::coarse_grained), 1, "tau_B/T_a",
              "the averaging window is long against the memory of the bath", "Quantum 4, 227 (2020), leading dependence"},
    Condition{ConditionKind::window_relaxation, "relaxation in window", bit(Equation::coarse_grained), 1,
              "T_a times the fastest decay rate", "the state hardly changes within the averaging window",
              "Quantum 4, 227 (2020), leading dependence"},
    Condition{ConditionKind::window_heating, "heating by the window", bit(Equation::coarse_grained), 5,
              "the largest change of up/(up + down) of two levels when their rates are averaged",
              "the window does not blur the spectrum so far that jumps upward find rate at higher frequencies",
              "follows from the averaged rates; common practice, no source"},
    Condition{ConditionKind::drive_over_window, "drive over window", bit(Equation::coarse_grained), 0.3, "|dH/dt| T_a tau_B",
              "the levels stand still while the bath is averaged", "common practice, no source"},
    Condition{ConditionKind::leakage, "leakage", kFastEquations, 1, "population that left the levels kept / tolerance asked",
              "what the levels left out would hold is below the error asked", "common practice, no source"},
};

constexpr bool concerns(const Condition& condition, Equation equation) { return (condition.equations & bit(equation)) != 0; }

}  // namespace tarn::runtime
