#include "lang/quantities/units.h"

#include <algorithm>
#include <array>
#include <cmath>

#include "lang/quantities/constants.h"
#include "lang/quantities/unit_slips.h"
#include "lang/support/near.h"

namespace tarn {
namespace {

struct UnitRow {
  std::string_view name;
  Unit unit;
  bool takes_prefix;
};

constexpr std::array<UnitRow, 16> kUnits{{
    {"s", {kTime, kSecond}, true},
    {"Hz", {kFrequency, kHertz}, true},
    {"K", {kTemperature, kKelvin}, true},
    {"J", {kEnergy, kJoule}, true},
    {"eV", {kEnergy, kElementaryChargeSi * kJoule}, true},
    {"A", {kCurrent, kAmpere}, true},
    {"V", {kVoltage, kVolt}, true},
    {"Wb", {kFlux, kWeber}, true},
    {"T", {kField, 1}, true},
    {"H", {kInductance, kWeber / kAmpere}, true},
    {"F", {kCapacitance, kCoulomb / kVolt}, true},
    {"C", {kCharge, kCoulomb}, true},
    {"Ohm", {kResistance, kVolt / kAmpere}, true},
    {"rad", {kAngle, 1}, true},
    {"Phi0", {kFlux, kPi}, true},  // h/2e = pi hbar/e.
    {"cycle", {kAngle, 2 * kPi}, false},
}};

struct Prefix {
  std::string_view text;
  double factor;
};
constexpr std::array<Prefix, 10> kPrefixes{{
    {"f", 1e-15}, {"p", 1e-12}, {"n", 1e-9}, {"u", 1e-6}, {"\xC2\xB5", 1e-6}, {"\xCE\xBC", 1e-6},
    {"m", 1e-3}, {"k", 1e3}, {"M", 1e6}, {"G", 1e9},
}};
constexpr Prefix kTera{"T", 1e12};

const UnitRow* find_row(std::string_view name) {
  const auto row = std::find_if(kUnits.begin(), kUnits.end(), [&](const UnitRow& r) { return r.name == name; });
  return row == kUnits.end() ? nullptr : &*row;
}

std::optional<Unit> with_prefix(std::string_view word, const Prefix& prefix) {
  if (!word.starts_with(prefix.text)) return std::nullopt;
  const UnitRow* row = find_row(word.substr(prefix.text.size()));
  if (row == nullptr || !row->takes_prefix) return std::nullopt;
  return Unit{row->unit.dimension, row->unit.factor * prefix.factor};
}

/// Names people write for the units above.
constexpr std::array<std::array<std::string_view, 2>, 10> kOtherNames{{
    {"sec", "s"}, {"second", "s"}, {"seconds", "s"}, {"hertz", "Hz"}, {"kelvin", "K"},
    {"ohm", "Ohm"}, {"percent", "%"}, {"cycles", "cycle"}, {"radian", "rad"}, {"tesla", "T"},
}};

/// Reads the factors of a unit text one after the other.
struct UnitReader {
  std::string_view text;
  std::size_t at = 0;

  void skip_spaces() {
    while (at < text.size() && (text[at] == ' ' || text[at] == '\t')) ++at;
  }
  bool done() {
    skip_spaces();
    return at == text.size();
  }
  bool take(char c) {
    skip_spaces();
    if (at == text.size() || text[at] != c) return false;
    ++at;
    return true;
  }
  std::string_view word() {
    skip_spaces();
    const std::size_t begin = at;
    while (at < text.size() && std::string_view(" \t*/^[]").find(text[at]) == std::string_view::npos) ++at;
    return text.substr(begin, at - begin);
  }
  Unexpected<UnitError> fail(UnitError::Reason reason, std::size_t begin, std::string_view found) const {
    UnitError error{reason, begin, begin + found.size(), std::string(found), {}};
    if (reason == UnitError::Reason::unknown_unit) error.near = near_unit(found);
    return Unexpected<UnitError>{std::move(error)};
  }
};

constexpr std::int32_t kLargestExponent = 1000;

Result<Unit, UnitError> read_factor(UnitReader& reader) {
  const std::string_view word = reader.word();
  const std::size_t begin = reader.at - word.size();
  if (word.empty()) {
    return reader.fail(UnitError::Reason::not_a_product, begin, reader.text.substr(begin, 1));
  }
  if (word == "1") return Unit{};
  const std::optional<Unit> unit = find_unit(word);
  if (!unit) return reader.fail(UnitError::Reason::unknown_unit, begin, word);
  if (!reader.take('^')) return *unit;
  const std::string_view exponent_text = reader.word();
  const std::optional<Rational> exponent = parse_rational(exponent_text);
  if (!exponent || exponent->numerator() > kLargestExponent || exponent->denominator() > kLargestExponent) {
    return reader.fail(UnitError::Reason::bad_exponent, reader.at - exponent_text.size(), exponent_text);
  }
  return Unit{pow(unit->dimension, *exponent), std::pow(unit->factor, exponent->value())};
}

}  // namespace

std::optional<Unit> find_unit(std::string_view word) {
  if (word == "%") return Unit{kNumber, 0.01};
  if (const UnitRow* row = find_row(word)) return row->unit;
  for (const Prefix& prefix : kPrefixes) {
    if (const auto unit = with_prefix(word, prefix)) return unit;
  }
  return with_prefix(word, kTera);
}

std::string near_unit(std::string_view word) {
  constexpr std::size_t kLongestWord = 12;
  if (word.empty() || word.size() > kLongestWord) return {};
  for (const auto& [other, unit] : kOtherNames) {
    if (equal_but_for_case(word, other)) return std::string(unit);
  }
  std::string best;
  std::size_t best_score = word.size() > 2 ? 4 : 3;  // Case counts 1, another letter 2.
  const auto consider = [&](std::string candidate) {
    const bool same_letters = equal_but_for_case(word, candidate);
    const std::size_t slip = find_unit_slip(candidate) != nullptr ? 1 : 0;
    const std::size_t score = (same_letters ? 1 : 2 * edit_distance(word, candidate)) + slip;
    if (score < best_score && (same_letters || candidate.size() > 1)) {
      best_score = score;
      best = std::move(candidate);
    }
  };
  for (const UnitRow& row : kUnits) {
    consider(std::string(row.name));
    for (const Prefix& prefix : kPrefixes) {
      if (row.takes_prefix && prefix.text.size() == 1) consider(std::string(prefix.text) + std::string(row.name));
    }
    if (row.takes_prefix) consider(std::string(kTera.text) + std::string(row.name));
  }
  return best;
}

Result<Unit, UnitError> parse_unit(std::string_view text) {
  UnitReader reader{text};
  if (reader.done()) return reader.fail(UnitError::Reason::empty, 0, "");
  Unit product;
  bool divide = false;
  while (true) {
    const auto factor = read_factor(reader);
    if (!factor) return factor;
    product.dimension = divide ? product.dimension / factor->dimension : product.dimension * factor->dimension;
    product.factor = divide ? product.factor / factor->factor : product.factor * factor->factor;
    if (reader.done()) break;
    divide = reader.take('/');
    if (!divide && !reader.take('*')) {
      return reader.fail(UnitError::Reason::not_a_product, reader.at, text.substr(reader.at, 1));
    }
  }
  if (!product.dimension.valid() || !std::isnormal(product.factor)) {
    return reader.fail(UnitError::Reason::too_large, 0, text);
  }
  return product;
}

HeaderCell split_header(std::string_view cell) {
  const auto trim = [](std::string_view part) {
    const auto first = part.find_first_not_of(" \t");
    if (first == std::string_view::npos) return std::string_view();
    return part.substr(first, part.find_last_not_of(" \t") - first + 1);
  };
  cell = trim(cell);
  const auto open = cell.rfind('[');
  if (!cell.ends_with(']') || open == std::string_view::npos) return {cell, {}, false};
  return {trim(cell.substr(0, open)), trim(cell.substr(open + 1, cell.size() - open - 2)), true};
}

NamedUnit default_unit(const Dimension& dimension) {
  if (dimension.is_number()) return {};
  // An energy is shown as a frequency, E/h: internally both are in rad/ns.
  if (dimension == kEnergy) return {"GHz", {kEnergy, 1e9 * kHertz}};
  const std::string text = unit_product(dimension);
  const auto unit = parse_unit(text);
  if (!unit) return {"?", {dimension, 1}};
  return {text, *unit};
}

std::string format_quantity(double value, const Dimension& dimension) {
  const NamedUnit named = default_unit(dimension);
  if (named.text.empty()) return fmt::format("{:.6g}", value);
  const bool product = named.text.find_first_of("*/^") != std::string::npos;
  const double shown = value / named.unit.factor;
  return product ? fmt::format("{:.6g} [{}]", shown, named.text) : fmt::format("{:.6g} {}", shown, named.text);
}

}  // namespace tarn
