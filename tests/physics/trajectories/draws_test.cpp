// Draws: the generator against its published numbers, and what makes its numbers independent of who asks.
#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <set>
#include <vector>

#include "runtime/trajectories/draws.h"

using namespace tarn::runtime;

// Known-answer vectors of the generator's publication (SC 2011, 16), from memory.
TEST_CASE("Philox4x32-10 gives its published numbers") {
  CHECK(philox({0, 0, 0, 0}, {0, 0}) == PhiloxCounter{0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8});
  const std::uint32_t ones = 0xffffffff;
  CHECK(philox({ones, ones, ones, ones}, {ones, ones}) == PhiloxCounter{0x408f276d, 0x41c83b0e, 0xa20bc7c6, 0x6d5451fd});
  CHECK(philox({0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344}, {0xa4093822, 0x299f31d0}) ==
        PhiloxCounter{0xd16cfe09, 0x94fdcceb, 0x5001e420, 0x24126ea1});
}

// ISO C++26, [rand.predef]: the 10000th number of a default philox4x32 is 1955073260 (from memory). Its key is
// 20111115, its counter starts at 0 and counts blocks of four.
TEST_CASE("Philox4x32-10 gives the number that the C++ standard names") {
  CHECK(philox({2499, 0, 0, 0}, {20111115, 0})[3] == 1955073260U);
}

TEST_CASE("a draw depends on seed, purpose, member and index, and on nothing else") {
  const double first = uniform_draw(1, DrawPurpose::trajectory, 2, 3);
  CHECK(first == uniform_draw(1, DrawPurpose::trajectory, 2, 3));
  std::set<double> others = {first};
  const std::uint64_t high = std::uint64_t{1} << 40U;
  for (const double other : {uniform_draw(2, DrawPurpose::trajectory, 2, 3), uniform_draw(1 + high, DrawPurpose::trajectory, 2, 3),
                             uniform_draw(1, DrawPurpose::start, 2, 3), uniform_draw(1, DrawPurpose::trajectory, 3, 3),
                             uniform_draw(1, DrawPurpose::trajectory, 2 + high, 3), uniform_draw(1, DrawPurpose::trajectory, 2, 4)}) {
    CHECK(others.insert(other).second);
  }
}

// Common practice, no source: chi-square of 64 bins, correlations of neighbours along index, member and seed.
TEST_CASE("draws are uniform, and neighbours are not related") {
  constexpr std::size_t kCount = 64000, kBins = 64;
  for (const int way : {0, 1, 2}) {
    std::vector<double> bins(kBins, 0.0);
    double product = 0, before = 0.5, lowest = 1, highest = 0;
    for (std::uint32_t k = 0; k < kCount; ++k) {
      const double u = way == 0   ? uniform_draw(7, DrawPurpose::trajectory, 0, k)
                       : way == 1 ? uniform_draw(7, DrawPurpose::trajectory, k, 0)
                                  : uniform_draw(k, DrawPurpose::trajectory, 0, 0);
      lowest = std::min(lowest, u);
      highest = std::max(highest, u);
      ++bins[std::min(static_cast<std::size_t>(u * kBins), kBins - 1)];
      product += 12 * (u - 0.5) * (before - 0.5);
      before = u;
    }
    CHECK(lowest > 0);
    CHECK(highest < 1);
    double chi_square = 0;
    for (const double bin : bins) chi_square += (bin - kCount / kBins) * (bin - kCount / kBins) * kBins / kCount;
    // 63 degrees of freedom: 63 +- 11.
    CHECK(chi_square < 63 + 4 * 11.2);
    CHECK(chi_square > 63 - 4 * 11.2);
    CHECK(std::abs(product) / std::sqrt(double{kCount}) < 4);
  }
}
