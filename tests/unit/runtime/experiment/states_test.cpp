#include <catch2/catch.hpp>

#include <cmath>
#include <numbers>

#include "hand_kernels.h"
#include "runtime/experiment/begin.h"
#include "runtime/experiment/kinks.h"
#include "runtime/experiment/state_sets.h"
#include "runtime/experiment/words.h"

using namespace tarn::runtime;
using hand::setting;

namespace {

/// A plan with its kernel, functions and levels.
struct Bench {
  Plan plan;
  Kernel kernel;
  Functions functions{kernel, {}, plan};
  ChipLevels levels{plan, kernel, functions, {}};
  std::vector<double> settings = functions.values(kSettings, 0, 0);
};

StateSet ground(std::optional<Setting> within = {}) { return {StateSetKind::ground, 0, "", within}; }

}  // namespace

TEST_CASE("levels of a ring of nine, by a Krylov space on the kernel's product") {
  // Closed form of the ground energy for odd and even rings: k = (2m+1) pi/n (Ann. Phys. 57, 79 (1970)).
  Bench bench{hand::ring_plan(), hand::ring_of_nine()};
  for (const double s : {0.2, 0.5, 0.8}) {
    const double g = (1 - s) * 2, j = s * 3;
    double expected = 0;
    for (int m = 0; m < 9; ++m) {
      expected -= std::sqrt(g * g + j * j - 2 * g * j * std::cos((2 * m + 1) * std::numbers::pi / 9));
    }
    const auto found = bench.levels.lowest(s, 3);
    REQUIRE(found);
    // At odd n the mode k = pi stands alone: its energy is g + j in the closed form.
    CHECK((*found)->energies[0] == Approx(expected).epsilon(1e-11));
    CHECK_FALSE((*found)->complete);
    const auto dense = all_levels(dense_operator(
        scaled_words(bench.plan.chip.hamiltonian, bench.functions.values(kCoefficients, s, 0)), 9));
    for (Eigen::Index k = 0; k < 3; ++k) CHECK((*found)->energies[k] == Approx(dense.energies[k]).epsilon(1e-11));
  }
}

TEST_CASE("the ground set of the ring at its end is two states, the next level many") {
  Bench bench{hand::ring_plan(), hand::ring_of_nine()};
  const auto space = level_space(ground(), bench.levels, 1, bench.settings);
  REQUIRE(space);
  CHECK(space->vectors.cols() == 2);
  CHECK(population(*space, State(product_state("000000000"))) == Approx(1));
  CHECK(population(*space, State(product_state("000010000"))) == Approx(0).margin(1e-12));
  // Two domain walls: 9 * 8 states.
  const auto walls = level_space({StateSetKind::level, 5, "", {}}, bench.levels, 1, bench.settings);
  REQUIRE(walls);
  CHECK(walls->vectors.cols() == 72);
  CHECK(population(*walls, State(product_state("000110000"))) == Approx(1));
  const auto begin = begin_state(bench.plan, bench.levels, 1, bench.settings);
  REQUIRE(begin);
  CHECK(begin->weights == std::vector<double>{0.5, 0.5});
}

TEST_CASE("ground within a range") {
  Bench bench{hand::two_qubit_plan(false), hand::two_qubits(false)};
  // Levels at s = 1 over b = 3: -1.8, -0.2, 0.8, 1.2; `within` is row 4, the parameter a = 2.
  CHECK(level_space(ground(setting(4)), bench.levels, 1, bench.settings)->vectors.cols() == 1);
  bench.settings[4] = 3 * 1.6;
  CHECK(level_space(ground(setting(4)), bench.levels, 1, bench.settings)->vectors.cols() == 2);
  bench.settings[4] = 3 * 2.7;
  CHECK(level_space(ground(setting(4)), bench.levels, 1, bench.settings)->vectors.cols() == 3);
}

TEST_CASE("the target is read off the diagonal at s = 1") {
  Bench bench{hand::two_qubit_plan(false), hand::two_qubits(false)};
  const auto target = find_target(bench.plan, bench.functions);
  REQUIRE(target);
  CHECK(target->states == std::vector<std::uint64_t>{2});
  CHECK(target->diagonal);
  bench.functions.set_input(1, 0);
  CHECK(find_target(bench.plan, bench.functions).error().kind == "constant_target");
  Bench single{hand::one_qubit_plan(), hand::one_qubit(false)};
  CHECK_FALSE(find_target(single.plan, single.functions)->diagonal);
}

TEST_CASE("means of words on kets and density matrices are those of their matrices") {
  std::srand(3);
  const std::vector<WordTerm> words = {{0.3, {5, 3}}, {1.7, {0, 6}}, {-0.4, {7, 7}}, {{0, 0.5}, {2, 0}}};
  const Eigen::MatrixXcd matrix = dense_operator(words, 3);
  const Ket psi = Ket::Random(8).normalized();
  const std::complex<double> expected = psi.dot(matrix * psi);
  CHECK(std::abs(mean_of(words, State(psi)) - expected) < 1e-14);
  CHECK(std::abs(mean_of(words, State(Density(psi * psi.adjoint()))) - expected) < 1e-14);
  CHECK(diagonal_of(words, 3).isApprox(matrix.diagonal().real()));
  CHECK(matrix.norm() <= norm_bound(words) * std::sqrt(8.0));
  // Qubit 0 is the most significant bit: X there takes |000> to |100>.
  CHECK(dense_operator({{1, {4, 0}}}, 3)(4, 0) == std::complex<double>(1));
  CHECK(product_state("+1")[3].real() == Approx(std::sqrt(0.5)));
  CHECK(product_state("-1")[3].real() == Approx(-std::sqrt(0.5)));
}

TEST_CASE("thermal state at the temperature that all baths share") {
  Bench bench{hand::one_qubit_plan(), hand::one_qubit(false)};
  Bath bath;
  bath.temperature = setting(6);
  bench.plan.chip.baths = {bath, bath};
  bench.plan.begin = BeginThermal{};
  bench.settings[6] = 0.4;
  const auto begin = begin_state(bench.plan, bench.levels, 0.5, bench.settings);  // levels at -1 and 1
  REQUIRE(begin);
  CHECK(begin->weights[0] == Approx(1 / (1 + std::exp(-2 / 0.4))).epsilon(1e-12));
  bench.plan.chip.baths[1].temperature = setting(5);
  CHECK(begin_state(bench.plan, bench.levels, 0.5, bench.settings).error().kind == "no_common_temperature");
  bench.settings[6] = 0;
  bench.plan.chip.baths.pop_back();
  CHECK(begin_state(bench.plan, bench.levels, 0.5, bench.settings)->kets.size() == 1);
}

TEST_CASE("populations of levels, shared within a level that is degenerate") {
  Bench bench{hand::ring_plan(), hand::ring_of_nine()};
  bench.plan.begin = BeginPopulations{{setting(3), setting(1), setting(3)}};
  const auto begin = begin_state(bench.plan, bench.levels, 1, bench.settings);
  REQUIRE(begin);
  REQUIRE(begin->kets.size() == 74);
  CHECK(begin->weights[0] == Approx(0.25));
  CHECK(begin->weights[1] == Approx(0.25));
  CHECK(begin->weights[2] == Approx(0.5 / 72));
  CHECK(std::abs(begin->kets[7].dot(begin->kets[8])) < 1e-11);
}

TEST_CASE("kinks in s become times, offsets that are held are noticed") {
  Bench bench{hand::one_qubit_plan(), hand::one_qubit(false)};
  const std::vector<double> found = kink_positions({{0, {0.25, 1.0 / 3, 2}}}, bench.functions);
  REQUIRE(found.size() == 2);
  CHECK(found[0] == Approx(0.25).margin(1e-13));
  CHECK(found[1] == Approx(1.0 / 3).margin(1e-13));
  const Timeline ramp{{{0, 10, 0, 1}}, 0, 1};
  bench.plan.chip.qubits[0].offset = setting(6);
  bench.settings[6] = 0.1;
  CHECK(held_offsets(bench.plan.chip, ramp, bench.settings).size() == 1);
  bench.settings[6] = 0;
  CHECK(held_offsets(bench.plan.chip, ramp, bench.settings).empty());
}
