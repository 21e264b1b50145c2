#pragma once
/// \file Units: from the text a user writes to a dimension and a factor.
///
/// Prefixes f p n u (or the micro sign) m k M G T on s Hz K J eV A V Wb T H F C Ohm
/// rad Phi0; `cycle` and `%` without prefix. Hz is one cycle per second.

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>

#include "lang/quantities/dimension.h"
#include "lang/support/result.h"

namespace tarn {

/// A value in this unit times `factor` is the value in internal units.
struct Unit {
  Dimension dimension;
  double factor = 1;
  bool operator==(const Unit&) const = default;
};

/// What a column or a printed value stands in.
struct NamedUnit {
  std::string text;  ///< Without brackets; empty for a plain number.
  Unit unit;
  bool operator==(const NamedUnit&) const = default;
};

/// Why a unit text is none. `begin`, `end`: the part at fault, in bytes of the text.
struct UnitError {
  enum class Reason { empty, unknown_unit, bad_exponent, not_a_product, too_large };
  Reason reason = Reason::empty;
  std::size_t begin = 0;
  std::size_t end = 0;
  std::string found;
  std::string near;  ///< A unit that is spelt almost so; empty if there is none.
};

/// One unit with its prefix: `GHz`, `us`, `%`. Nothing if there is no such unit.
std::optional<Unit> find_unit(std::string_view word);

/// The unit spelt most like `word`; empty if none is near.
std::string near_unit(std::string_view word);

/// What stands between the brackets: `1/us`, `uPhi0^2/Hz`, `rad / ns`, `1`; spaces
/// are free. `a/b*c` is (a/b)*c, as for numbers.
Result<Unit, UnitError> parse_unit(std::string_view text);

/// Splits a header cell `name [unit]`. The unit is empty where there are no brackets;
/// `has_unit` tells `x []` and `x` apart.
struct HeaderCell {
  std::string_view name;
  std::string_view unit;
  bool has_unit = false;
};
HeaderCell split_header(std::string_view cell);

/// The unit results stand in when nobody says otherwise: ns, GHz (an energy as E/h),
/// 1/us, mK, rad, nA, uV, Phi0, pH, fF, Ohm, fC, mT, else a product of these. It
/// depends on the dimension alone, never on the size of a value.
NamedUnit default_unit(const Dimension& dimension);

/// `value` (internal units) with its default unit: `3 GHz`, `0.25`, `0.2 [1/us]`; six
/// significant digits.
std::string format_quantity(double value, const Dimension& dimension);

}  // namespace tarn
