// Verdicts against the hierarchy on random chips: some of those that tests/bench/validity_calibration runs.
#include <catch2/catch.hpp>
#include <algorithm>
#include <map>

#include "random_cases.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;

// Populations of runs called within are off by less than 0.02, as the table was made to do in 95 of 100 runs: the
// exact answer is the hierarchy's (J. Phys. Soc. Jpn. 58, 101 (1989)), good to 2e-3.
TEST_CASE("runs called within are right") {
  std::map<Validity, int> met;
  int within = 0, right = 0, judged = 0;
  double worst_outside = 0;
  for (const unsigned seed : {1U, 3U, 62U, 65U, 68U, 69U, 71U, 72U, 73U, 74U, 75U, 131U}) {
    const auto verdicts = judged_case(random_case(seed), 2e-3, 120);
    REQUIRE(verdicts);
    for (const CaseVerdict& verdict : *verdicts) {
      ++judged;
      ++met[verdict.validity.validity];
      if (verdict.validity.validity == Validity::outside) worst_outside = std::max(worst_outside, verdict.error);
      if (verdict.validity.validity != Validity::within) continue;
      ++within;
      right += verdict.error < 0.02;
      INFO("seed " << seed << ", equation " << static_cast<int>(verdict.equation) << ", off by " << verdict.error << "; " << verdict.validity.reason);
      CHECK(verdict.error < 0.06);
    }
  }
  CHECK(right >= 0.95 * within);
  // A judge that calls nothing within, or nothing outside, would pass the above.
  CHECK(3 * within > judged);
  CHECK(met[Validity::marginal] > 0);
  CHECK(met[Validity::outside] > 0);
  CHECK(worst_outside > 0.05);
}
