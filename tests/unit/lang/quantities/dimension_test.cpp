#include <catch2/catch.hpp>

#include "lang/quantities/dimension.h"

using namespace tarn;

TEST_CASE("fractions stay in lowest terms") {
  CHECK(Rational::of(2, 4) == Rational::of(1, 2));
  CHECK(Rational::of(1, -2) == Rational::of(-1, 2));
  CHECK(Rational::of(1, 3) + Rational::of(1, 6) == Rational::of(1, 2));
  CHECK(Rational::of(2, 3) * Rational::of(3, 2) == Rational(1));
  CHECK_FALSE(Rational::of(1, 0).valid());
}

TEST_CASE("fractions that do not fit stay invalid") {
  Rational big(1'000'000);
  big = big * big;
  CHECK_FALSE(big.valid());
  CHECK_FALSE((big + Rational(1)).valid());
  CHECK_FALSE(pow(kTime, Rational::invalid()).valid());
}

TEST_CASE("fractions are read and written") {
  CHECK(parse_rational("0.5") == Rational::of(1, 2));
  CHECK(parse_rational("12") == Rational(12));
  CHECK_FALSE(parse_rational("1."));
  CHECK_FALSE(parse_rational(".5"));
  CHECK_FALSE(parse_rational("-1"));
  CHECK_FALSE(parse_rational("99999999999999999999"));
  CHECK_FALSE(parse_rational(""));
  CHECK(to_text(Rational::of(-3, 4)) == "-0.75");
  CHECK(to_text(Rational::of(1, 3)) == "1/3");
  CHECK(nearest_rational(1.0 / 3.0) == Rational::of(1, 3));
  CHECK(nearest_rational(-1.5) == Rational::of(-3, 2));
  CHECK_FALSE(nearest_rational(0.1234567));
  CHECK_FALSE(nearest_rational(1e300));
}

TEST_CASE("angle is a dimension: a frequency is no rate") {
  CHECK(kFrequency != kRate);
  CHECK(kFrequency / kAngle == kRate);
  CHECK((kFrequency * kTime) == kAngle);
}

TEST_CASE("electrical dimensions hang together") {
  CHECK(kVoltage * kCurrent == kEnergy / kTime);
  CHECK(kFlux * kCurrent == kEnergy);
  CHECK(pow(kFlux, 2) / kInductance == kEnergy);
  CHECK(pow(kCharge, 2) / kCapacitance == kEnergy);
  CHECK(kResistance * kCapacitance == kTime);
  CHECK(kInductance / kResistance == kTime);
}

TEST_CASE("dimensions are named in the user's words") {
  CHECK(describe(kTime) == "a time");
  CHECK(describe(kFrequency) == "a frequency");
  CHECK(describe(kNumber) == "a plain number");
  CHECK(describe(pow(kFrequency, 2)) == "a quantity in [GHz^2]");
  CHECK(describe(pow(kFlux, 2) / kFrequency) == "a quantity in [Phi0^2/GHz]");
  CHECK(describe(pow(kRate, Rational::of(1, 2))) == "a quantity in [1/ns^0.5]");
  CHECK(describe(kField) == "a magnetic field");
  CHECK(named_dimension("rate") == kRate);
  CHECK_FALSE(named_dimension("count"));
}
