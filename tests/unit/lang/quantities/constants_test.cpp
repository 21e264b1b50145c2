// Values: CODATA 2018 and the exact constants of the SI (2019).
#include <catch2/catch.hpp>

#include "lang/quantities/constants.h"
#include "lang/quantities/units.h"

using namespace tarn;

TEST_CASE("the constants of the SI are exact") {
  CHECK(kBoltzmannSi == 1.380649e-23);
  CHECK(kPlanckSi == 6.62607015e-34);
  CHECK(kElementaryChargeSi == 1.602176634e-19);
}

TEST_CASE("derived constants have their CODATA values") {
  CHECK(kFluxQuantumSi == Approx(2.067833848e-15).epsilon(3e-10));                       // [Wb]
  CHECK(kBoltzmannSi / kPlanckSi / 1e9 == Approx(20.836619).epsilon(3e-8));              // [GHz/K]
  CHECK(find_unit("mK")->factor == Approx(0.130920339127).epsilon(1e-11));               // kB T/hbar [rad/ns]
  CHECK(kHbarSi == Approx(1.054571817e-34).epsilon(1e-9));                               // [J s]
  CHECK(find_unit("Phi0")->factor / find_unit("Wb")->factor == Approx(2.067833848e-15).epsilon(3e-10));
  CHECK(find_unit("eV")->factor / find_unit("GHz")->factor == Approx(2.417989242e5).epsilon(1e-9));  // e/h [GHz/eV]
}

TEST_CASE("predefined constants are one in internal units") {
  const Unit kelvin = *find_unit("K");
  const Unit joule = *find_unit("J");
  // kB * 1 K is 1.380649e-23 J: the number kB stands for 1 because both sides are in rad/ns.
  CHECK(kPredefinedConstants[2].value * kelvin.factor == Approx(1.380649e-23 * joule.factor).epsilon(1e-14));
  CHECK(kPredefinedConstants[2].dimension * kelvin.dimension == joule.dimension);
  // hbar * 1 rad/ns is 1.054571817e-25 J.
  CHECK(kPredefinedConstants[1].value * 1.0 == Approx(1.054571817e-25 * joule.factor).epsilon(1e-9));
  CHECK(kPredefinedConstants[1].dimension * kFrequency == kEnergy);
  // e * 1 V is 1 eV.
  CHECK(kPredefinedConstants[3].value * find_unit("V")->factor == Approx(find_unit("eV")->factor).epsilon(1e-14));
}
