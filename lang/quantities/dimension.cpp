#include "lang/quantities/dimension.h"

#include <algorithm>
#include <vector>

namespace tarn {
namespace {

struct NamedDimension {
  std::string_view word;
  std::string_view phrase;
  Dimension dimension;
};

constexpr std::array<NamedDimension, 14> kNamed{{
    {"number", "a plain number", kNumber},
    {"angle", "an angle", kAngle},
    {"time", "a time", kTime},
    {"frequency", "a frequency", kFrequency},
    {"rate", "a rate", kRate},
    {"energy", "an energy", kEnergy},
    {"temperature", "a temperature", kTemperature},
    {"charge", "a charge", kCharge},
    {"current", "a current", kCurrent},
    {"voltage", "a voltage", kVoltage},
    {"flux", "a flux", kFlux},
    {"inductance", "an inductance", kInductance},
    {"capacitance", "a capacitance", kCapacitance},
    {"resistance", "a resistance", kResistance},
}};

/// Units a product is built of, in the order in which they are written.
struct ProductUnit {
  std::string_view text;
  Dimension dimension;
};
constexpr std::array<ProductUnit, 13> kProductUnits{{
    {"Phi0", kFlux},
    {"nA", kCurrent},
    {"uV", kVoltage},
    {"ueV", kEnergy},
    {"GHz", kFrequency},
    {"mK", kTemperature},
    {"rad", kAngle},
    {"fC", kCharge},
    {"pH", kInductance},
    {"fF", kCapacitance},
    {"Ohm", kResistance},
    {"mT", kField},
    {"ns", kTime},
}};
constexpr std::array<Rational, 8> kSimplePowers{
    Rational(1), Rational(-1), Rational(2), Rational(-2), Rational::of(1, 2), Rational::of(-1, 2), Rational(3), Rational(-3)};

struct Factor {
  std::string_view unit;
  Rational power;
};

std::string write_product(const std::vector<Factor>& factors) {
  std::string text;
  const auto append = [&](const Factor& factor, std::string_view separator) {
    const Rational power = factor.power.is_negative() ? -factor.power : factor.power;
    text += separator;
    text += factor.unit;
    if (power != Rational(1)) text += "^" + to_text(power);
  };
  for (const Factor& factor : factors) {
    if (!factor.power.is_negative()) append(factor, text.empty() ? "" : "*");
  }
  if (text.empty()) text = "1";
  for (const Factor& factor : factors) {
    if (factor.power.is_negative()) append(factor, "/");
  }
  return text;
}

std::vector<Factor> base_factors(const Dimension& dimension) {
  constexpr std::array<std::string_view, kBaseCount> kBaseUnits{"ns", "rad", "ueV", "mK", "fC", "mT"};
  std::vector<Factor> factors;
  for (const Base base : {Base::energy, Base::temperature, Base::charge, Base::field, Base::angle, Base::time}) {
    const Rational power = dimension.power(base);
    if (!power.is_zero()) factors.push_back({kBaseUnits[static_cast<std::size_t>(base)], power});
  }
  return factors;
}

/// At most two units with simple powers, if that is enough.
std::vector<Factor> short_factors(const Dimension& dimension) {
  for (const Rational power : kSimplePowers) {
    for (const ProductUnit& unit : kProductUnits) {
      if (pow(unit.dimension, power) == dimension) return {{unit.text, power}};
    }
  }
  for (const Rational p : kSimplePowers) {
    for (const Rational q : kSimplePowers) {
      for (std::size_t i = 0; i < kProductUnits.size(); ++i) {
        const Dimension rest = dimension / pow(kProductUnits[i].dimension, p);
        for (std::size_t j = i + 1; j < kProductUnits.size(); ++j) {
          if (pow(kProductUnits[j].dimension, q) == rest) return {{kProductUnits[i].text, p}, {kProductUnits[j].text, q}};
        }
      }
    }
  }
  return {};
}

}  // namespace

std::optional<Dimension> named_dimension(std::string_view word) {
  const auto row = std::find_if(kNamed.begin(), kNamed.end(), [&](const NamedDimension& n) { return n.word == word; });
  if (row == kNamed.end()) return std::nullopt;
  return row->dimension;
}

std::string unit_product(const Dimension& dimension) {
  if (dimension.is_number()) return "1";
  if (!dimension.valid()) return "?";
  if (dimension == kRate) return "1/us";
  const std::vector<Factor> factors = short_factors(dimension);
  return write_product(factors.empty() ? base_factors(dimension) : factors);
}

std::string describe(const Dimension& dimension) {
  const auto row =
      std::find_if(kNamed.begin(), kNamed.end(), [&](const NamedDimension& n) { return n.dimension == dimension; });
  if (row != kNamed.end()) return std::string(row->phrase);
  if (dimension == kField) return "a magnetic field";
  return "a quantity in [" + unit_product(dimension) + "]";
}

}  // namespace tarn
