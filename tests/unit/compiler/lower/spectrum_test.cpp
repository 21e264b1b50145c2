#include "compiler/lower/spectrum.h"

#include <catch2/catch.hpp>
#include <cmath>

using namespace tarn;
using namespace tarn::compiler;

namespace {

/// Writes densities as nodes: parameters 0.. are strengths, cut-offs and so on.
struct Writer {
  Graph graph;
  NodeId w() { return graph.add({.op = NodeOp::w}); }
  NodeId parameter(std::uint32_t index) { return graph.add({.op = NodeOp::parameter, .index = index}); }
  NodeId number(double value) { return graph.constant(value, kNumber, {}); }
  NodeId op(NodeOp op, NodeId a, NodeId b) { return graph.add({.op = op, .a = a, .b = b}); }
  NodeId op(NodeOp op, NodeId a) { return graph.add({.op = op, .a = a}); }
  NodeId mul(NodeId a, NodeId b) { return op(NodeOp::mul, a, b); }
  NodeId div(NodeId a, NodeId b) { return op(NodeOp::div, a, b); }
  NodeId add(NodeId a, NodeId b) { return op(NodeOp::add, a, b); }
  NodeId pow(NodeId a, double b) { return op(NodeOp::pow, a, number(b)); }
};

double at(const Graph& graph, NodeId id, const std::vector<double>& parameters, double w = 0) {
  Bindings bindings;
  bindings.parameters = parameters;
  bindings.w = w;
  return evaluate(graph, id, bindings);
}

}  // namespace

TEST_CASE("an Ohmic density is a power law with exponent 1") {
  Writer write;
  const NodeId decay = write.op(NodeOp::exp, write.div(write.op(NodeOp::neg, write.w()), write.parameter(1)));
  const NodeId density = write.mul(write.mul(write.parameter(0), write.w()), decay);
  const auto found = recognise_spectrum(write.graph, density);
  REQUIRE(found.has_value());
  REQUIRE(found->size() == 1);
  const auto& law = std::get<RecognisedPowerLaw>(found->front());
  CHECK(at(write.graph, law.strength, {2e-4, 50}) == Approx(2e-4));
  CHECK(at(write.graph, law.cutoff, {2e-4, 50}) == Approx(50));
  CHECK(at(write.graph, law.exponent, {2e-4, 50}) == 1);
}

TEST_CASE("w^p exp(-w/c) gives the power law whatever way it is written") {
  Writer write;
  const NodeId decay = write.op(NodeOp::exp, write.op(NodeOp::neg, write.div(write.w(), write.parameter(1))));
  const NodeId power = write.op(NodeOp::pow, write.div(write.w(), write.parameter(1)), write.parameter(2));
  const NodeId density = write.mul(write.parameter(0), write.mul(power, decay));
  const auto found = recognise_spectrum(write.graph, density);
  REQUIRE(found.has_value());
  const auto& law = std::get<RecognisedPowerLaw>(found->front());
  const std::vector<double> parameters{3e-3, 40, 2.5};
  const double eta = at(write.graph, law.strength, parameters), cutoff = at(write.graph, law.cutoff, parameters);
  const double exponent = at(write.graph, law.exponent, parameters);
  for (const double w : {0.3, 4.0, 77.0}) {
    const double closed = eta * w * std::pow(w / cutoff, exponent - 1) * std::exp(-w / cutoff);
    CHECK(closed == Approx(at(write.graph, density, parameters, w)).epsilon(1e-13));
  }
}

TEST_CASE("Drude and peak are told apart by their denominators, sums by their summands") {
  Writer write;
  const NodeId square = write.pow(write.div(write.w(), write.parameter(1)), 2);
  const NodeId drude = write.div(write.mul(write.parameter(0), write.w()), write.add(write.number(1), square));
  const NodeId detuned = write.op(NodeOp::sub, write.pow(write.w(), 2), write.pow(write.parameter(2), 2));
  const NodeId damping = write.mul(write.parameter(3), write.w());
  const NodeId below = write.add(write.pow(detuned, 2), write.pow(damping, 2));
  const NodeId peak = write.div(write.mul(write.parameter(4), write.w()), below);
  const auto found = recognise_spectrum(write.graph, write.add(drude, peak));
  REQUIRE(found.has_value());
  REQUIRE(found->size() == 2);
  const std::vector<double> parameters{1e-3, 12, 30, 2.5, 7};
  const auto& d = std::get<RecognisedDrude>((*found)[0]);
  CHECK(at(write.graph, d.strength, parameters) == Approx(1e-3));
  CHECK(at(write.graph, d.cutoff, parameters) == Approx(12));
  const auto& p = std::get<RecognisedPeak>((*found)[1]);
  const double centre = at(write.graph, p.centre, parameters), width = at(write.graph, p.width, parameters);
  const double strength = at(write.graph, p.strength, parameters);
  CHECK(centre == Approx(30));
  CHECK(width == Approx(2.5));
  for (const double w : {1.0, 29.0, 64.0}) {
    const double lorentz = std::pow(w * w - centre * centre, 2) + std::pow(width * w, 2);
    const double closed = 2 / std::acos(-1.0) * strength * centre * centre * width * w / lorentz;
    CHECK(closed == Approx(at(write.graph, peak, parameters, w)).epsilon(1e-12));
  }
}

TEST_CASE("what has no closed form is left to quadrature") {
  Writer write;
  CHECK_FALSE(recognise_spectrum(write.graph, write.op(NodeOp::tanh, write.w())).has_value());
  CHECK_FALSE(recognise_spectrum(write.graph, write.mul(write.parameter(0), write.w())).has_value());
  const NodeId gaussian = write.op(NodeOp::exp, write.op(NodeOp::neg, write.pow(write.w(), 2)));
  CHECK_FALSE(recognise_spectrum(write.graph, write.mul(write.w(), gaussian)).has_value());
}
