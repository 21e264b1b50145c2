#pragma once
/// \file Units that are hardly ever meant: the prefix in the wrong case.

#include <array>
#include <string_view>

namespace tarn {

struct UnitSlip {
  std::string_view written, is, meant;
};

inline constexpr auto kUnitSlips = std::to_array<UnitSlip>({
    {"mHz", "a thousandth of a hertz", "MHz"},
    {"MK", "a million kelvin", "mK"},
    {"MeV", "a million electronvolts", "meV"},
    {"Ms", "a million seconds", "ms"},
});

/// The slip that this unit would be; null for other units.
constexpr const UnitSlip* find_unit_slip(std::string_view unit) {
  for (const UnitSlip& slip : kUnitSlips) {
    if (slip.written == unit) return &slip;
  }
  return nullptr;
}

}  // namespace tarn
