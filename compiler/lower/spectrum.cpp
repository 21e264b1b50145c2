#include "compiler/lower/spectrum.h"

#include <array>
#include <cmath>

#include "lang/quantities/constants.h"

namespace tarn::compiler {
namespace {

constexpr std::size_t kDegrees = 5;
/// Coefficients of w^0 .. w^4; none stands for zero.
using Polynomial = std::array<std::optional<NodeId>, kDegrees>;

/// Builds nodes. Dimensions are checked long before; what is built here is read by position only.
class Builder {
 public:
  explicit Builder(Graph& graph) : graph_(graph) {}
  const Node& operator[](NodeId id) const { return graph_[id]; }
  NodeId number(double value) { return graph_.constant(value, kNumber, {}); }
  NodeId binary(NodeOp op, NodeId a, NodeId b) { return graph_.add({.op = op, .a = a, .b = b}); }
  NodeId unary(NodeOp op, NodeId a) { return graph_.add({.op = op, .a = a}); }
  NodeId mul(NodeId a, NodeId b) { return binary(NodeOp::mul, a, b); }
  NodeId div(NodeId a, NodeId b) { return binary(NodeOp::div, a, b); }
  bool reads_w(NodeId id) const { return dependence(graph_, id).w; }

 private:
  Graph& graph_;
};

std::optional<NodeId> sum(Builder& build, std::optional<NodeId> a, std::optional<NodeId> b, NodeOp op) {
  if (!b) return a;
  if (!a) return op == NodeOp::add ? b : std::optional(build.unary(NodeOp::neg, *b));
  return build.binary(op, *a, *b);
}

std::optional<Polynomial> times(Builder& build, const Polynomial& a, const Polynomial& b) {
  Polynomial result;
  for (std::size_t i = 0; i < kDegrees; ++i) {
    for (std::size_t j = 0; j < kDegrees; ++j) {
      if (!a[i] || !b[j]) continue;
      if (i + j >= kDegrees) return std::nullopt;
      result[i + j] = sum(build, result[i + j], build.mul(*a[i], *b[j]), NodeOp::add);
    }
  }
  return result;
}

std::optional<Polynomial> polynomial(Builder& build, NodeId id);

std::optional<Polynomial> integer_power(Builder& build, const Node& node) {
  const Node exponent = build[node.b];
  const bool small = exponent.op == NodeOp::constant && exponent.number >= 1 && exponent.number <= 4 &&
                     exponent.number == std::floor(exponent.number);
  auto base = small ? polynomial(build, node.a) : std::nullopt;
  auto result = base;
  for (int k = 1; result && k < static_cast<int>(exponent.number); ++k) result = times(build, *result, *base);
  return result;
}

/// `id` as a polynomial in w (w > 0, so abs(w) is w), if it is one of degree below kDegrees.
std::optional<Polynomial> polynomial(Builder& build, NodeId id) {
  Polynomial result;
  if (!build.reads_w(id)) {
    result[0] = id;
    return result;
  }
  const Node node = build[id];
  if (node.op == NodeOp::w || (node.op == NodeOp::abs && build[node.a].op == NodeOp::w)) {
    result[1] = build.number(1);
    return result;
  }
  if (node.op == NodeOp::pow) return integer_power(build, node);
  const auto a = polynomial(build, node.a);
  if (!a) return std::nullopt;
  if (node.op == NodeOp::neg) return times(build, *a, {build.number(-1)});
  if (node.op == NodeOp::div && !build.reads_w(node.b)) {
    return times(build, *a, {build.div(build.number(1), node.b)});
  }
  const bool joins = node.op == NodeOp::add || node.op == NodeOp::sub || node.op == NodeOp::mul;
  const auto b = joins ? polynomial(build, node.b) : std::nullopt;
  if (!b) return std::nullopt;
  if (node.op == NodeOp::mul) return times(build, *a, *b);
  for (std::size_t k = 0; k < kDegrees; ++k) result[k] = sum(build, (*a)[k], (*b)[k], node.op);
  return result;
}

/// strength * w^power * exp(-w rate) * table / denominator.
struct Summand {
  NodeId strength;
  NodeId power;
  std::optional<NodeId> rate;
  std::optional<Polynomial> denominator;
  std::optional<std::uint32_t> table;
};

void scale(Builder& build, Summand& summand, NodeId factor, bool inverse) {
  summand.strength = build.binary(inverse ? NodeOp::div : NodeOp::mul, summand.strength, factor);
}

/// (c w)^exponent with c free of w.
bool take_power(Builder& build, Summand& summand, NodeId base, NodeId exponent, bool inverse) {
  const auto linear = polynomial(build, base);
  if (!linear || !(*linear)[1] || (*linear)[0] || (*linear)[2] || (*linear)[3] || (*linear)[4]) return false;
  if (build.reads_w(exponent)) return false;
  scale(build, summand, build.binary(NodeOp::pow, *(*linear)[1], exponent), inverse);
  summand.power = build.binary(inverse ? NodeOp::sub : NodeOp::add, summand.power, exponent);
  return true;
}

bool take_exponential(Builder& build, Summand& summand, NodeId argument, bool inverse) {
  const auto linear = polynomial(build, argument);
  if (!linear || (*linear)[2] || (*linear)[3] || (*linear)[4] || !(*linear)[1]) return false;
  if ((*linear)[0]) scale(build, summand, build.unary(NodeOp::exp, *(*linear)[0]), inverse);
  const NodeId rate = inverse ? *(*linear)[1] : build.unary(NodeOp::neg, *(*linear)[1]);
  summand.rate = sum(build, summand.rate, rate, NodeOp::add);
  return true;
}

bool take_factor(Builder& build, Summand& summand, NodeId id, bool inverse) {
  if (!build.reads_w(id)) {
    scale(build, summand, id, inverse);
    return true;
  }
  const Node node = build[id];
  if (node.op == NodeOp::mul || node.op == NodeOp::div) {
    const bool other = inverse != (node.op == NodeOp::div);
    return take_factor(build, summand, node.a, inverse) && take_factor(build, summand, node.b, other);
  }
  if (node.op == NodeOp::neg) {
    scale(build, summand, build.number(-1), false);
    return take_factor(build, summand, node.a, inverse);
  }
  if (node.op == NodeOp::exp) return take_exponential(build, summand, node.a, inverse);
  if (node.op == NodeOp::table) {
    if (inverse || summand.table || build[node.a].op != NodeOp::w) return false;
    summand.table = node.index;
    return true;
  }
  if (take_power(build, summand, id, build.number(1), inverse)) return true;
  if (node.op == NodeOp::pow && take_power(build, summand, node.a, node.b, inverse)) return true;
  if (node.op == NodeOp::sqrt && take_power(build, summand, node.a, build.number(0.5), inverse)) return true;
  if (!inverse || summand.denominator) return false;
  summand.denominator = polynomial(build, id);
  return summand.denominator.has_value();
}

bool is_number(const Builder& build, NodeId id, double value) {
  return build[id].op == NodeOp::constant && build[id].number == value;
}

/// strength w / (p0 + p2 w^2) or strength w / (p0 + p2 w^2 + p4 w^4).
std::optional<RecognisedSpectrum> resonance(Builder& build, const Summand& summand) {
  const Polynomial& p = *summand.denominator;
  if (summand.rate || summand.table || !is_number(build, summand.power, 1)) return std::nullopt;
  if (p[1] || p[3] || !p[0] || !p[2]) return std::nullopt;
  if (!p[4]) {
    const NodeId cutoff = build.unary(NodeOp::sqrt, build.div(*p[0], *p[2]));
    return RecognisedDrude{build.div(summand.strength, *p[0]), cutoff};
  }
  const NodeId centre_squared = build.unary(NodeOp::sqrt, build.div(*p[0], *p[4]));
  const NodeId width_squared = build.binary(NodeOp::add, build.div(*p[2], *p[4]),
                                            build.mul(build.number(2), centre_squared));
  const NodeId width = build.unary(NodeOp::sqrt, width_squared);
  const NodeId norm = build.mul(build.mul(*p[4], build.number(2 / kPi)), build.mul(centre_squared, width));
  return RecognisedPeak{build.div(summand.strength, norm), build.unary(NodeOp::sqrt, centre_squared), width};
}

std::optional<RecognisedSpectrum> form(Builder& build, const Summand& summand) {
  if (summand.denominator) return resonance(build, summand);
  if (summand.table) {
    const bool bare = !summand.rate && is_number(build, summand.power, 0);
    return bare ? std::optional<RecognisedSpectrum>(RecognisedTable{summand.strength, *summand.table}) : std::nullopt;
  }
  if (!summand.rate) return std::nullopt;
  const NodeId cutoff = build.div(build.number(1), *summand.rate);
  const NodeId excess = build.binary(NodeOp::sub, summand.power, build.number(1));
  return RecognisedPowerLaw{build.mul(summand.strength, build.binary(NodeOp::pow, cutoff, excess)), cutoff,
                            summand.power};
}

bool collect(Builder& build, NodeId id, bool negative, std::vector<RecognisedSpectrum>& found) {
  const Node node = build[id];
  if (node.op == NodeOp::add || node.op == NodeOp::sub) {
    return collect(build, node.a, negative, found) &&
           collect(build, node.b, negative != (node.op == NodeOp::sub), found);
  }
  Summand summand{build.number(negative ? -1 : 1), build.number(0), {}, {}, {}};
  if (!take_factor(build, summand, id, false)) return false;
  const auto recognised = form(build, summand);
  if (recognised) found.push_back(*recognised);
  return recognised.has_value();
}

}  // namespace

std::optional<std::vector<RecognisedSpectrum>> recognise_spectrum(Graph& graph, NodeId density) {
  Builder build(graph);
  std::vector<RecognisedSpectrum> found;
  if (!collect(build, density, false, found)) return std::nullopt;
  return found;
}

}  // namespace tarn::compiler
