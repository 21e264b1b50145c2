// How many points go at a time where the memory is short, and when none does.
#include <catch2/catch.hpp>

#include "runtime/experiment/memory.h"

using namespace tarn::runtime;

// Arithmetic, no source: common + jobs x each_job must not exceed what is there.
TEST_CASE("as many jobs as the memory holds, and none where not even one fits") {
  const MemoryNeed need{100, 50};
  CHECK(jobs_that_fit(need, 4, 1e9) == 4);
  CHECK(jobs_that_fit(need, 4, 300) == 4);
  CHECK(jobs_that_fit(need, 4, 299) == 3);
  CHECK(jobs_that_fit(need, 4, 150) == 1);
  CHECK(jobs_that_fit(need, 4, 149) == 0);
  CHECK(jobs_that_fit({0, 0}, 4, 1) == 4);
}
