#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>

#include "runtime/integrate/pair853.h"
#include "tests/unit/runtime/integrate/rooted_trees.h"

using namespace tarn;
using runtime::pair853::interpolant_weights;
using runtime::pair853::kStages;
using runtime::pair853::kTable;

namespace {

/// Largest broken condition among trees of exactly `order` vertices, for sum_i b_i u_i = x^order / density.
template <class Weights>
double worst_condition(const std::vector<test::Tree>& trees, const std::vector<std::vector<double>>& u,
             const Weights& b, std::size_t order, double x, double right_side) {
  double result = 0;
  for (std::size_t k = 0; k < trees.size(); ++k) {
    if (trees[k].order != order) continue;
    double sum = 0;
    for (std::size_t i = 0; i < kStages; ++i) sum += b[i] * u[k][i];
    const double expected = right_side * std::pow(x, static_cast<double>(order)) / trees[k].density;
    result = std::max(result, std::abs(sum - expected));
  }
  return result;
}

}  // namespace

// Conditions: Solving Ordinary Differential Equations I (Springer, 1993), II.2 and II.6.
TEST_CASE("the pair 8(5,3) meets the order conditions") {
  const auto trees = test::rooted_trees(9);
  const auto u = test::elementary_weights(trees, kTable.a, kStages);

  SECTION("there are as many trees as the literature counts") {
    const std::array<std::ptrdiff_t, 9> numbers = {1, 1, 2, 4, 9, 20, 48, 115, 286};
    for (std::size_t order = 1; order <= 9; ++order)
      CHECK(std::count_if(trees.begin(), trees.end(), [&](const test::Tree& t) {
              return t.order == order;
            }) == numbers[order - 1]);
  }
  SECTION("rows of the stages add up to the nodes") {
    for (std::size_t i = 0; i < kStages; ++i) {
      double sum = 0;
      for (std::size_t j = 0; j < kStages; ++j) sum += kTable.a[i][j];
      CHECK(sum == Approx(kTable.c[i]).margin(2e-15));
    }
  }
  SECTION("the step has order 8 and no more") {
    for (std::size_t order = 1; order <= 8; ++order)
      CHECK(worst_condition(trees, u, kTable.b, order, 1, 1) < 5e-15);
    CHECK(worst_condition(trees, u, kTable.b, 9, 1, 1) > 1e-8);
  }
  SECTION("the error estimates vanish through orders 3 and 5 and no further") {
    for (std::size_t order = 1; order <= 3; ++order)
      CHECK(worst_condition(trees, u, kTable.error3, order, 1, 0) < 5e-15);
    CHECK(worst_condition(trees, u, kTable.error3, 4, 1, 0) > 1e-5);
    for (std::size_t order = 1; order <= 5; ++order)
      CHECK(worst_condition(trees, u, kTable.error5, order, 1, 0) < 5e-15);
    CHECK(worst_condition(trees, u, kTable.error5, 6, 1, 0) > 1e-6);
  }
  SECTION("the interpolant has order 7 everywhere in the step") {
    for (const double x : {0.05, 0.3, 0.5, 0.77, 0.96})
      for (std::size_t order = 1; order <= 7; ++order)
        CHECK(worst_condition(trees, u, interpolant_weights(x), order, x, 1) < 2e-14);
  }
  SECTION("the interpolant joins smoothly: it ends on the step") {
    const auto end = interpolant_weights(1), begin = interpolant_weights(0);
    for (std::size_t i = 0; i < kStages; ++i) {
      CHECK(end[i] == Approx(kTable.b[i]).margin(1e-15));
      CHECK(begin[i] == 0);
    }
  }
}
