#include <catch2/catch.hpp>

#include <string>

#include "lang/quantities/constants.h"
#include "lang/quantities/units.h"

using namespace tarn;

namespace {

double factor(const char* text) {
  const auto unit = parse_unit(text);
  REQUIRE(unit);
  return unit->factor;
}
Dimension dimension(const char* text) {
  const auto unit = parse_unit(text);
  REQUIRE(unit);
  return unit->dimension;
}
UnitError error(const char* text) {
  const auto unit = parse_unit(text);
  REQUIRE_FALSE(unit);
  return unit.error();
}

}  // namespace

TEST_CASE("one hertz is one cycle a second") {
  CHECK(factor("GHz") == Approx(2 * kPi).epsilon(1e-15));
  CHECK(dimension("Hz") == kFrequency);
  CHECK(factor("cycle/ns") == Approx(factor("GHz")).epsilon(1e-15));
  CHECK(factor("rad/ns") == Approx(1.0).epsilon(1e-15));
  CHECK(8 * factor("GHz") == Approx(50.27).epsilon(1e-3));  // The language's own example.
}

TEST_CASE("every prefix scales every unit that takes one") {
  const std::string prefixes[] = {"f", "p", "n", "u", "\xC2\xB5", "\xCE\xBC", "m", "k", "M", "G", "T"};
  const double scales[] = {1e-15, 1e-12, 1e-9, 1e-6, 1e-6, 1e-6, 1e-3, 1e3, 1e6, 1e9, 1e12};
  const std::string units[] = {"s", "Hz", "K", "J", "eV", "A", "V", "Wb", "T", "H", "F", "C", "Ohm", "rad", "Phi0"};
  for (const std::string& unit : units) {
    const auto plain = find_unit(unit);
    REQUIRE(plain);
    for (std::size_t i = 0; i < std::size(prefixes); ++i) {
      INFO(prefixes[i] + unit);
      const auto scaled = find_unit(prefixes[i] + unit);
      REQUIRE(scaled);
      CHECK(scaled->dimension == plain->dimension);
      CHECK(scaled->factor == Approx(plain->factor * scales[i]).epsilon(1e-14));
    }
  }
  CHECK_FALSE(find_unit("kcycle"));
  CHECK_FALSE(find_unit("m%"));
  CHECK_FALSE(find_unit("m"));
  CHECK_FALSE(find_unit(""));
}

TEST_CASE("products of units") {
  CHECK(dimension("uPhi0^2/Hz") == pow(kFlux, 2) / kFrequency);
  CHECK(factor("uPhi0^2/Hz") == Approx(1e-12 * kPi * kPi / kHertz).epsilon(1e-14));
  CHECK(dimension("1/us") == kRate);
  CHECK(factor("1/us") == Approx(1e-3).epsilon(1e-15));
  CHECK(dimension("V/Hz^0.5") == kVoltage / pow(kFrequency, Rational::of(1, 2)));
  CHECK(factor("ns/ns*ns") == Approx(1.0));
  CHECK(factor(" rad / ns ") == factor("rad/ns"));
  CHECK(factor("%") == 0.01);
  CHECK(factor("1") == 1.0);
}

TEST_CASE("faulty unit texts say where and why") {
  CHECK(error("").reason == UnitError::Reason::empty);
  CHECK(error("GHz/feet").reason == UnitError::Reason::unknown_unit);
  CHECK(error("GHz/feet").begin == 4);
  CHECK(error("Ghz").near == "GHz");
  CHECK(error("usec").near == "");
  CHECK(error("GHz^x").reason == UnitError::Reason::bad_exponent);
  CHECK(error("GHz^2000").reason == UnitError::Reason::bad_exponent);
  CHECK(error("GHz//ns").reason == UnitError::Reason::not_a_product);
  CHECK(error("GHz ns").reason == UnitError::Reason::not_a_product);
  CHECK(error("GHz^900").reason == UnitError::Reason::too_large);
}

TEST_CASE("near units") {
  CHECK(near_unit("ghz") == "GHz");
  CHECK(near_unit("Mhz") == "MHz");
  CHECK(near_unit("mhz") == "MHz");  // Not the millihertz.
  CHECK(near_unit("mk") == "mK");
  CHECK(near_unit("sec") == "s");
  CHECK(near_unit("GHzz") == "GHz");
  CHECK(near_unit("drive").empty());
  CHECK(near_unit(std::string(1000, 'x')).empty());
}

TEST_CASE("default units depend on the dimension alone and are read back") {
  CHECK(default_unit(kTime).text == "ns");
  CHECK(default_unit(kFrequency).text == "GHz");
  CHECK(default_unit(kEnergy).text == "GHz");
  CHECK(default_unit(kRate).text == "1/us");
  CHECK(default_unit(kTemperature).text == "mK");
  CHECK(default_unit(kNumber).text.empty());
  for (const Dimension& d : {kTime, kAngle, kFrequency, kRate, kTemperature, kCharge, kCurrent, kVoltage, kFlux,
                             kInductance, kCapacitance, kResistance, kField, pow(kFlux, 2) / kFrequency,
                             kEnergy * kTime / kAngle, pow(kTemperature, 3) * kCharge / kTime}) {
    const NamedUnit unit = default_unit(d);
    INFO(unit.text);
    const auto again = parse_unit(unit.text);
    REQUIRE(again);
    CHECK(again->dimension == d);
    CHECK(again->factor == unit.unit.factor);
  }
  // E/h: an energy of h * 1 GHz is shown as 1 GHz.
  CHECK(kPlanckSi * 1e9 * kJoule / default_unit(kEnergy).unit.factor == Approx(1.0).epsilon(1e-14));
}

TEST_CASE("quantities are written with their unit") {
  CHECK(format_quantity(3 * factor("GHz"), kFrequency) == "3 GHz");
  CHECK(format_quantity(0.25, kNumber) == "0.25");
  CHECK(format_quantity(2e-4, kRate) == "0.2 [1/us]");
}

TEST_CASE("headers split into name and unit") {
  CHECK(split_header(" B [GHz] ").name == "B");
  CHECK(split_header(" B [GHz] ").unit == "GHz");
  CHECK(split_header("rate error [1/us]").name == "rate error");
  CHECK_FALSE(split_header("s").has_unit);
  CHECK(split_header("s []").has_unit);
  CHECK(split_header("").name.empty());
}
