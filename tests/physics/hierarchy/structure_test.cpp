// The hierarchy as equations: against the same equations written out, and what follows from their form.
#include <Eigen/Core>
#include <catch2/catch.hpp>
#include <cmath>

#include "brute_hierarchy.h"
#include "memory_models.h"
#include "runtime/equation/hierarchy.h"
#include "tests/support/dense.h"

using namespace tarn::runtime;
using namespace tarn::runtime::testing;
using Complex = std::complex<double>;

namespace {

Eigen::MatrixXcd invented_matrix(Eigen::Index n, bool hermitian) {
  Eigen::MatrixXcd m(n, n);
  for (Eigen::Index i = 0; i < n; ++i)
    for (Eigen::Index j = 0; j < n; ++j) {
      const double x = static_cast<double>(i * n + j);
      m(i, j) = {std::sin(1 + 1.7 * x), std::cos(0.3 + 2.9 * x)};
    }
  return hermitian ? Eigen::MatrixXcd((m + m.adjoint()) / 2) : m;
}

Density invented_state(Eigen::Index n) {
  const Eigen::MatrixXcd m = invented_matrix(n, false);
  const Density rho = tarn::test::product_of(m, m.adjoint());
  return rho / rho.trace();
}

OpenSystem invented_system(Eigen::Index n, const std::vector<Eigen::MatrixXcd>& couplings,
                           const std::vector<ExponentialSum>& baths) {
  OpenSystem system;
  system.dimension = n;
  const Eigen::MatrixXcd h = invented_matrix(n, true);
  system.hamiltonian = [h](double, double, Eigen::MatrixXcd& out) { out = h; };
  for (const Eigen::MatrixXcd& a : couplings) system.couplings.push_back(constant_coupling(a));
  system.baths = baths;
  return system;
}

/// A damped mode beside a real exponential, and a white rest.
ExponentialSum invented_bath() {
  ExponentialSum bath = damped_mode({0.3, 0.1}, {0.2, -0.05}, {0.8, 2.5});
  bath.terms.push_back({{0.4, -0.3}, {0.4, 0.3}, 1.7});
  bath.rest = 0.07;
  return bath;
}

ExponentialSum one_exponential() { return {{{{0.5, -0.2}, {0.5, 0.2}, 1.3}}, 0.05, 0}; }

}  // namespace

// The same equations, unscaled, as one matrix exponential (Eigen 3.4, unsupported/MatrixFunctions).
TEST_CASE("a hierarchy against its equations written out") {
  OpenSystem system;
  int depth = 4;
  SECTION("one qubit, any coupling, jumps") {
    system = invented_system(2, {invented_matrix(2, true)}, {invented_bath()});
    system.jumps = {0.3 * invented_matrix(2, false)};
  }
  SECTION("one qubit, a diagonal coupling") { system = invented_system(2, {pauli('Z')}, {invented_bath()}); }
  SECTION("two qubits, one of each kind") {
    depth = 3;
    system = invented_system(4, {pauli_word("ZI"), pauli_word("IX")}, {one_exponential(), one_exponential()});
    system.jumps = {0.2 * invented_matrix(4, false)};
  }
  SECTION("three qubits") {
    depth = 1;
    system = invented_system(8, {pauli_word("ZIX"), pauli_word("IZI")}, {one_exponential(), one_exponential()});
  }
  const double t = 1.5;
  const Density initial = invented_state(system.dimension);
  const auto states = hierarchy_states(system, depth, static_run(t), initial, {t}, 1e-11);
  CHECK((states[0] - brute_hierarchy(system, depth, initial, t)).norm() < 1e-9);
  // Of the form of the equations: traces and Hermiticity stay, to rounding.
  CHECK(std::abs(states[0].trace() - 1.0) < 1e-13);
  CHECK((states[0] - states[0].adjoint()).norm() < 1e-13);
}

TEST_CASE("a coupling that is asked for at every s gives what a constant one gives") {
  OpenSystem system = invented_system(2, {invented_matrix(2, true)}, {one_exponential()});
  const auto constant = hierarchy_states(system, 5, static_run(1), invented_state(2), {1});
  system.couplings[0].constant = false;
  const auto asked = hierarchy_states(system, 5, static_run(1), invented_state(2), {1});
  CHECK((constant[0] - asked[0]).norm() == 0);
}

// H and A turned by the same unitary turn the state: holds diagonal and other couplings together along a ramp.
TEST_CASE("a ramp in another basis") {
  OpenSystem system = one_qubit(0, 0, one_exponential());
  system.hamiltonian = [](double s, double, Eigen::MatrixXcd& h) { h = -(1 - s) * pauli('X') - 2 * (s - 0.4) * pauli('Z'); };
  const Eigen::MatrixXcd turn = (pauli('X') + pauli('Z')) / std::sqrt(2.0);
  OpenSystem turned = system;
  turned.hamiltonian = [](double s, double, Eigen::MatrixXcd& h) { h = -(1 - s) * pauli('Z') - 2 * (s - 0.4) * pauli('X'); };
  turned.couplings = {constant_coupling(pauli('X'))};
  Timeline timeline;
  timeline.segments = {{0, 2, 0, 0.7}, {2, 3, 0.7, 0.7}, {3, 4, 0.2, 1}};  // A ramp, a hold, a sudden step and a ramp.
  const Density initial = invented_state(2), initial_turned = turn * initial * turn;
  const auto states = hierarchy_states(system, 6, timeline, initial, {1, 3, 4});
  const auto others = hierarchy_states(turned, 6, timeline, initial_turned, {1, 3, 4});
  for (std::size_t k = 0; k < 3; ++k) CHECK((turn * states[k] * turn - others[k]).norm() < 1e-9);
}

// Independent parts: the state of both is the product of their states. Depths add: 2 x 5 in the product is within 10.
TEST_CASE("two qubits with baths of their own and no bond") {
  const OpenSystem left = one_qubit(1.5, 0.7, one_exponential()), right = one_qubit(0.8, -1.1, drude_sum(0.01, 4, 2, 1));
  OpenSystem both;
  both.dimension = 4;
  both.hamiltonian = [](double, double, Eigen::MatrixXcd& h) {
    h = -0.75 * pauli_word("XI") - 0.35 * pauli_word("ZI") - 0.4 * pauli_word("IX") + 0.55 * pauli_word("IZ");
  };
  both.couplings = {constant_coupling(pauli_word("ZI")), constant_coupling(pauli_word("IZ"))};
  both.baths = {left.baths[0], right.baths[0]};
  const Density a = invented_state(2), b = Density::Constant(2, 2, 0.5);
  const auto kronecker = [](const Density& x, const Density& y) {
    Density product(4, 4);
    for (Eigen::Index i = 0; i < 2; ++i)
      for (Eigen::Index j = 0; j < 2; ++j) product.block(2 * i, 2 * j, 2, 2) = x(i, j) * y;
    return product;
  };
  const double t = 1;
  const auto joint = hierarchy_states(both, 10, static_run(t), kronecker(a, b), {t});
  const auto of_left = hierarchy_states(left, 10, static_run(t), a, {t});
  const auto of_right = hierarchy_states(right, 10, static_run(t), b, {t});
  CHECK((joint[0] - kronecker(of_left[0], of_right[0])).norm() < 1e-6);
}

TEST_CASE("a run that is asked to stop, and one that is not finite") {
  const OpenSystem system = one_qubit(1, 1, one_exponential());
  const Timeline timeline = static_run(5);
  const MemoryRun run{&timeline, {}, {}, 1e-9};
  const Visit nothing = [](std::size_t, const State&) {};
  const auto stopped = propagate_hierarchy(system, 3, run, invented_state(2), nothing, [] { return true; });
  REQUIRE(!stopped);
  CHECK(stopped.error().kind == "interrupted");
  OpenSystem broken = system;
  broken.hamiltonian = [](double, double, Eigen::MatrixXcd& h) { h.setConstant(NAN); };
  const auto failed = propagate_hierarchy(broken, 3, run, invented_state(2), nothing, {});
  REQUIRE(!failed);
  CHECK(failed.error().kind == "not_finite");
  OpenSystem large = one_qubit(1, 1, drude_sum(0.01, 5, 1, 30));
  const auto refused = propagate_hierarchy(large, 20, run, invented_state(2), nothing, {});
  REQUIRE(!refused);
  CHECK(refused.error().kind == "too_large");
  // 31 exponentials, depth 20: binomial(51, 20) matrices of 8 doubles in 21 vectors, at least.
  CHECK(hierarchy_bytes(large, 20) > 21 * 64 * 7.7e13);
}

// The product C(n + d, d) = C(n + d - 1, d - 1) (n + d) / d, and every link up has its link down.
TEST_CASE("the numbering of the matrices") {
  const auto modes = hierarchy_modes(std::vector<ExponentialSum>{invented_bath(), one_exponential()});
  REQUIRE(modes.size() == 4);
  CHECK(hierarchy_count(4, 5) == 126);
  const HierarchyIndices indices = hierarchy_indices(modes, 2, 5);
  CHECK(indices.count == 126);
  CHECK(indices.links.size() == 2 * 4 * 70);  // binomial(8, 4) matrices have a link up for every mode.
  CHECK(!indices.plain[0]);
  CHECK(indices.plain[1]);
  std::size_t matched = 0;
  for (std::size_t a = 0; a < indices.count; ++a)
    for (std::size_t c = 0; c < 2; ++c) {
      const std::size_t part = 2 * (2 * a + c);
      for (std::uint32_t l = part == 0 ? 0 : indices.ends[part - 1]; l < indices.ends[part]; ++l) {
        const std::size_t to = indices.links[l].to, back = 2 * (2 * to + c);
        for (std::uint32_t m = indices.ends[back]; m < indices.ends[back + 1]; ++m) matched += indices.links[m].to == a;
      }
    }
  CHECK(matched == 4 * 70);
}
