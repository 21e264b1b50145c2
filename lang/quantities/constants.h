#pragma once
/// \file Constants of nature (SI 2019, exact; CODATA 2018) and the internal units.
///
/// Internal units: time in ns, angle in rad, energy as E/hbar in rad/ns, temperature
/// as kB T/hbar in rad/ns, charge in e, magnetic field in T.

#include <array>
#include <numbers>
#include <string_view>

#include "lang/quantities/dimension.h"

namespace tarn {

inline constexpr double kPi = std::numbers::pi;
inline constexpr double kBoltzmannSi = 1.380649e-23;          ///< [J/K], exact.
inline constexpr double kPlanckSi = 6.62607015e-34;           ///< [J s], exact.
inline constexpr double kHbarSi = kPlanckSi / (2 * kPi);      ///< [J s/rad].
inline constexpr double kElementaryChargeSi = 1.602176634e-19;  ///< [C], exact.
inline constexpr double kFluxQuantumSi = kPlanckSi / (2 * kElementaryChargeSi);  ///< [Wb].

/// SI units in internal units.
inline constexpr double kSecond = 1e9;                          ///< [ns]
inline constexpr double kHertz = 2 * kPi / kSecond;             ///< One cycle a second, [rad/ns].
inline constexpr double kJoule = 1 / (kHbarSi * kSecond);       ///< [rad/ns]
inline constexpr double kKelvin = kBoltzmannSi * kJoule;        ///< [rad/ns]
inline constexpr double kCoulomb = 1 / kElementaryChargeSi;     ///< [e]
inline constexpr double kAmpere = kCoulomb / kSecond;           ///< [e/ns]
inline constexpr double kVolt = kJoule / kCoulomb;              ///< [rad/ns/e]
inline constexpr double kWeber = kVolt * kSecond;               ///< [rad/e]: hbar/e of flux.

/// A predefined name of the language with its value in internal units.
struct PredefinedConstant {
  std::string_view name;
  double value;
  Dimension dimension;
};

inline constexpr std::array<PredefinedConstant, 4> kPredefinedConstants{{
    {"pi", kPi, kNumber},
    {"hbar", 1.0, kEnergy * kTime / kAngle},
    {"kB", 1.0, kEnergy / kTemperature},
    {"e", 1.0, kCharge},
}};

}  // namespace tarn
