#include <catch2/catch.hpp>
#include <set>

#include "compiler/codegen/sweep_plan.h"
#include "compiler/codegen/tile.h"

using namespace tarn;
using namespace tarn::compiler;

TEST_CASE("tiles cover every amplitude once, and flips lead where they should", "[codegen]") {
  const std::uint32_t bits = GENERATE(range(2u, 13u));
  const std::uint32_t lane_bits = GENERATE(0u, 1u, 2u);
  const std::uint32_t register_bits = GENERATE(0u, 2u, 3u);
  const Tile tile = choose_tile(bits, lane_bits, register_bits, bits, GENERATE(false, true));
  const auto position = [&](std::uint64_t base, std::uint64_t v) { return (base ^ tile.far_offset(v)) + tile.near_offset(v); };
  std::set<std::uint64_t> seen;
  std::size_t wrong = 0;
  for (std::uint64_t k = 0; k < tile.bases(); ++k) {
    const std::uint64_t base = k << tile.base_shift();
    for (std::uint64_t v = 0; v < tile.vectors(); ++v) {
      wrong += seen.insert(position(base, v)).second ? 0u : 1u;
      for (std::uint64_t mask = 0; mask >> bits == 0; mask += 1 + mask / 7) {
        const Place place = tile.flipped(mask, v);
        const std::uint64_t whole = mask >> lane_bits << lane_bits;
        wrong += position(base ^ place.rest, place.vector) == (position(base, v) ^ whole) ? 0u : 1u;
      }
    }
  }
  CHECK(wrong == 0);
  CHECK(seen.size() << lane_bits == std::uint64_t{1} << bits);
}

TEST_CASE("a plan fuses what it can and stores each sign vector once", "[codegen]") {
  ir::Generator generator{"H", 3, {}, {}, false};
  generator.sum.groups = {{0, {{-0.5, {1, 0}}, {-0.5, {2, 0}}, {-0.5, {4, 0}}}},
                          {1, {{0.3, {0, 1}}, {0.7, {0, 6}}}},
                          {2, {{0.3, {0, 1}}, {0.7, {0, 6}}, {{0, 2}, {0, 0}}}}};
  const SweepPlan plan = plan_sweep(generator);
  REQUIRE(plan.flips.size() == 4);
  CHECK(plan.vectors.size() == 1);
  CHECK(plan.prepared_doubles() == 8);
  CHECK(plan.flips[0].prepared_real.size() == 2);
  CHECK(plan.flips[0].imaginary == LinearForm{{2, 2.0}});
  CHECK(plan.flips[1].real == LinearForm{{0, -0.5}});
  CHECK(plan.flips[1].real == plan.flips[3].real);
}

TEST_CASE("row elements are those of the Pauli matrices", "[codegen]") {
  // Y = ((0, -i), (i, 0)), written out.
  ir::Generator generator{"Y", 1, {}, {}, false};
  generator.sum.groups = {{0, {{1.0, {1, 1}}}}};
  const SweepPlan plan = plan_sweep(generator);
  const auto top = row_elements(plan, 0), bottom = row_elements(plan, 1);
  REQUIRE((top.size() == 1 && bottom.size() == 1));
  CHECK(top[0].imaginary == LinearForm{{0, -1.0}});
  CHECK(bottom[0].imaginary == LinearForm{{0, 1.0}});
  CHECK(top[0].real.empty());
}
