#include "lang/quantities/rational.h"

#include <charconv>
#include <cmath>

namespace tarn {

std::optional<Rational> parse_rational(std::string_view text) {
  std::int64_t numerator = 0;
  std::int64_t denominator = 1;
  bool after_point = false;
  bool digits = false;
  for (const char c : text) {
    if (c == '.' && !after_point && digits) {
      after_point = true;
      continue;
    }
    if (c < '0' || c > '9' || numerator > INT32_MAX || denominator > INT32_MAX) return std::nullopt;
    digits = true;
    numerator = numerator * 10 + (c - '0');
    if (after_point) denominator *= 10;
  }
  const Rational value = Rational::of(numerator, denominator);
  if (!digits || text.ends_with('.') || !value.valid()) return std::nullopt;
  return value;
}

std::optional<Rational> nearest_rational(double value) {
  constexpr int kLargestDenominator = 12;
  constexpr double kLargest = 1e6;
  if (!(std::abs(value) <= kLargest)) return std::nullopt;
  for (int denominator = 1; denominator <= kLargestDenominator; ++denominator) {
    const double numerator = std::round(value * denominator);
    if (std::abs(value - numerator / denominator) <= 1e-12 * std::max(1.0, std::abs(value))) {
      return Rational::of(static_cast<std::int64_t>(numerator), denominator);
    }
  }
  return std::nullopt;
}

std::string to_text(Rational value) {
  if (!value.valid()) return "?";
  std::string text = std::to_string(value.numerator());
  if (value.is_integer()) return text;
  std::int64_t scale = 1;
  for (int digits = 1; digits <= 4; ++digits) {
    scale *= 10;
    if (scale % value.denominator() != 0) continue;
    const std::int64_t scaled = std::abs(value.numerator() * (scale / value.denominator()));
    std::string fraction = std::to_string(scaled % scale);
    fraction.insert(0, static_cast<std::size_t>(digits) - fraction.size(), '0');
    return (value.is_negative() ? "-" : "") + std::to_string(scaled / scale) + "." + fraction;
  }
  return text + "/" + std::to_string(value.denominator());
}

}  // namespace tarn
