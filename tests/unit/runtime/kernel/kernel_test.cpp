#include <catch2/catch.hpp>

#include "lang/support/check.h"
#include "runtime/kernel/input_block.h"

using namespace tarn;
using namespace tarn::runtime;

namespace {

void entry() {}

/// A table written by hand: one set "a" of two rows, one generator "H" of two bits.
struct HandMade {
  tarn_function_set sets[1] = {{"a", 2}};
  tarn_generator generators[1] = {{"H", 2, 4}};
  tarn_entry entries[4] = {{TARN_VALUES, 0, entry}, {TARN_PREPARE, 0, entry}, {TARN_APPLY, 0, entry}, {TARN_STAGE, 0, entry}};
  tarn_kernel table = {TARN_ABI_VERSION, 4, 3, 1, 1, 1, 4, 0, sets, generators, entries};
};

}  // namespace

TEST_CASE("a kernel answers what its table says", "[kernel]") {
  HandMade made;
  const auto kernel = Kernel::adopt(&made.table, {});
  REQUIRE(kernel);
  CHECK(kernel->lanes() == 4);
  CHECK(kernel->rows(0) == 2);
  CHECK(kernel->bits(0) == 2);
  CHECK(kernel->prepared_doubles(0) == 4);
  CHECK(kernel->find_set("a") == 0u);
  CHECK(kernel->find_generator("H") == 0u);
  CHECK_FALSE(kernel->find_set("H").has_value());
  CHECK(kernel->values(0) != nullptr);
  CHECK(kernel->derivatives(0) == nullptr);
  CHECK(kernel->lane_apply(0) == nullptr);
  CHECK_THROWS_AS(kernel->rows(1), InternalError);
}

TEST_CASE("tables that cannot be are refused", "[kernel]") {
  HandMade made;
  SECTION("another version") { made.table.abi_version = TARN_ABI_VERSION + 1; }
  SECTION("impossible lanes") { made.table.lanes = 3; }
  SECTION("a set without code") { made.entries[0].index = 5; }
  SECTION("a generator without its stage") { made.table.entries = 3; }
  CHECK_FALSE(Kernel::adopt(&made.table, {}));
}

TEST_CASE("the release runs once, after the last copy", "[kernel]") {
  HandMade made;
  int released = 0;
  {
    auto kernel = Kernel::adopt(&made.table, [&] { ++released; });
    REQUIRE(kernel);
    const Kernel copy = *kernel;
    kernel = Kernel::adopt(&made.table, {});
    CHECK(released == 0);
  }
  CHECK(released == 1);
}

TEST_CASE("files that are no kernel are refused", "[kernel]") {
  CHECK_FALSE(Kernel::open("/nonexistent/kernel.so"));
  CHECK_FALSE(Kernel::open("/dev/null"));
  const auto other = Kernel::open("libm.so.6");
  REQUIRE_FALSE(other);
  CHECK(other.error().message.find("tarn_kernel_table") != std::string::npos);
}

TEST_CASE("an input block fills every lane and packs tables as the interface says", "[kernel]") {
  HandMade made;
  const auto kernel = Kernel::adopt(&made.table, {});
  const TableNumbers table{{0, 1, 3}, {{{10, 20}, {11, 21}, {12, 22}, {13, 23}}}};
  InputBlock block(*kernel, {&table, 1});
  block.set_all(std::vector<double>{1, 2, 3});
  block.set(1, 2, 7);
  InputBlock moved = std::move(block);
  const double* const inputs = moved.block()->inputs;
  CHECK(std::vector<double>(inputs, inputs + 12) == std::vector<double>{1, 1, 1, 1, 2, 2, 7, 2, 3, 3, 3, 3});
  const double* const numbers = moved.block()->tables[0];
  CHECK(std::vector<double>(numbers, numbers + 11) == std::vector<double>{0, 1, 3, 10, 20, 11, 21, 12, 22, 13, 23});
  CHECK(moved.get(1, 2) == 7);
  CHECK_THROWS_AS(moved.set(3, 0.0), InternalError);
}
