#pragma once
/// \file Dimensions: rational powers of time, angle, energy, temperature and charge.
///
/// Angle is a dimension of its own: a frequency is angle/time, a rate 1/time. The
/// magnetic field is a sixth base, because no length is known here that would
/// relate it to the flux.

#include <fmt/format.h>

#include <array>
#include <cstddef>
#include <optional>
#include <string>
#include <string_view>

#include "lang/quantities/rational.h"

namespace tarn {

enum class Base : std::size_t { time, angle, energy, temperature, charge, field };
inline constexpr std::size_t kBaseCount = 6;

/// Exponents of the bases; all zero for a plain number.
struct Dimension {
  std::array<Rational, kBaseCount> powers{};

  constexpr Rational power(Base base) const { return powers[static_cast<std::size_t>(base)]; }
  constexpr bool is_number() const { return *this == Dimension{}; }
  /// False once an exponent has grown past what a Rational holds.
  constexpr bool valid() const {
    for (const Rational& p : powers) {
      if (!p.valid()) return false;
    }
    return true;
  }
  constexpr bool operator==(const Dimension&) const = default;
};

// Written out, since GCC 12 refuses the loop over a default-initialised array in a constant.
template <class Combine>
constexpr Dimension from_powers(const Combine& power_at) {
  return Dimension{{power_at(0), power_at(1), power_at(2), power_at(3), power_at(4), power_at(5)}};
}
constexpr Dimension operator*(const Dimension& a, const Dimension& b) {
  return from_powers([&](std::size_t i) { return a.powers[i] + b.powers[i]; });
}
constexpr Dimension operator/(const Dimension& a, const Dimension& b) {
  return from_powers([&](std::size_t i) { return a.powers[i] - b.powers[i]; });
}
constexpr Dimension pow(const Dimension& a, Rational exponent) {
  return from_powers([&](std::size_t i) { return a.powers[i] * exponent; });
}
constexpr Dimension base_dimension(Base base) {
  return from_powers([&](std::size_t i) { return Rational(i == static_cast<std::size_t>(base) ? 1 : 0); });
}

inline constexpr Dimension kNumber{};
inline constexpr Dimension kTime = base_dimension(Base::time);
inline constexpr Dimension kAngle = base_dimension(Base::angle);
inline constexpr Dimension kEnergy = base_dimension(Base::energy);
inline constexpr Dimension kTemperature = base_dimension(Base::temperature);
inline constexpr Dimension kCharge = base_dimension(Base::charge);
inline constexpr Dimension kField = base_dimension(Base::field);
inline constexpr Dimension kFrequency = kAngle / kTime;
inline constexpr Dimension kRate = kNumber / kTime;
inline constexpr Dimension kCurrent = kCharge / kTime;
inline constexpr Dimension kVoltage = kEnergy / kCharge;
inline constexpr Dimension kFlux = kVoltage * kTime;
inline constexpr Dimension kInductance = kFlux / kCurrent;
inline constexpr Dimension kCapacitance = kCharge / kVoltage;
inline constexpr Dimension kResistance = kVoltage / kCurrent;

/// The dimension a type name of the language stands for: `number`, `angle`, `time`,
/// `frequency`, `rate`, `energy`, `temperature`, `charge`, `current`, `voltage`,
/// `flux`, `inductance`, `capacitance`, `resistance`. Nothing for other words
/// (`count`, `truth` and `text` are kinds, not dimensions).
std::optional<Dimension> named_dimension(std::string_view word);

/// As the user reads it: "a time", "a frequency", "a plain number", else a unit
/// product such as "a quantity in [Phi0^2/GHz]".
std::string describe(const Dimension& dimension);

/// Unit product without brackets that stands for the dimension: `ns`, `GHz`,
/// `Phi0^2/GHz`, `1/us`; `1` for a plain number.
std::string unit_product(const Dimension& dimension);

}  // namespace tarn

template <>
struct fmt::formatter<tarn::Dimension> : fmt::formatter<std::string_view> {
  template <class Context>
  auto format(const tarn::Dimension& dimension, Context& context) const {
    return fmt::formatter<std::string_view>::format(tarn::describe(dimension), context);
  }
};
