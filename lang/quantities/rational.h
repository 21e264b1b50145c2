#pragma once
/// \file Small exact fractions: the exponents of dimensions.

#include <cstdint>
#include <numeric>
#include <optional>
#include <string>
#include <string_view>

namespace tarn {

/// numerator/denominator in lowest terms, denominator > 0. Where 32 bits do not
/// suffice the result is invalid (denominator 0) and stays so in later operations.
class Rational {
 public:
  constexpr Rational() = default;
  constexpr Rational(int value) : numerator_(value) {}

  static constexpr Rational of(std::int64_t numerator, std::int64_t denominator) {
    if (denominator == 0) return invalid();
    if (denominator < 0) {
      numerator = -numerator;
      denominator = -denominator;
    }
    const std::int64_t divisor = std::gcd(numerator, denominator);
    numerator /= divisor;
    denominator /= divisor;
    constexpr std::int64_t limit = INT32_MAX;
    if (numerator > limit || numerator < -limit || denominator > limit) return invalid();
    Rational result;
    result.numerator_ = static_cast<std::int32_t>(numerator);
    result.denominator_ = static_cast<std::int32_t>(denominator);
    return result;
  }
  static constexpr Rational invalid() {
    Rational result;
    result.denominator_ = 0;
    return result;
  }

  constexpr bool valid() const { return denominator_ != 0; }
  constexpr std::int32_t numerator() const { return numerator_; }
  constexpr std::int32_t denominator() const { return denominator_; }
  constexpr bool is_zero() const { return numerator_ == 0 && valid(); }
  constexpr bool is_integer() const { return denominator_ == 1; }
  constexpr bool is_negative() const { return numerator_ < 0; }
  constexpr double value() const { return static_cast<double>(numerator_) / denominator_; }

  constexpr bool operator==(const Rational&) const = default;
  friend constexpr Rational operator-(Rational a) { return combine(a, a, -a.numerator_, a.denominator_); }
  friend constexpr Rational operator+(Rational a, Rational b) {
    return combine(a, b, std::int64_t{a.numerator_} * b.denominator_ + std::int64_t{b.numerator_} * a.denominator_,
                   std::int64_t{a.denominator_} * b.denominator_);
  }
  friend constexpr Rational operator-(Rational a, Rational b) { return a + (-b); }
  friend constexpr Rational operator*(Rational a, Rational b) {
    return combine(a, b, std::int64_t{a.numerator_} * b.numerator_, std::int64_t{a.denominator_} * b.denominator_);
  }

 private:
  static constexpr Rational combine(Rational a, Rational b, std::int64_t numerator, std::int64_t denominator) {
    return a.valid() && b.valid() ? of(numerator, denominator) : invalid();
  }

  std::int32_t numerator_ = 0;
  std::int32_t denominator_ = 1;
};

/// Exact value of plain decimal text such as `2`, `0.5`, `1.25`; nothing if it is
/// no such text or does not fit.
std::optional<Rational> parse_rational(std::string_view text);

/// The fraction with denominator <= 12 that `value` equals to 1e-12, if there is
/// one: the exponent meant by `x^(1/3)`.
std::optional<Rational> nearest_rational(double value);

/// `2`, `-1`, `0.5`, `1/3`.
std::string to_text(Rational value);

}  // namespace tarn
