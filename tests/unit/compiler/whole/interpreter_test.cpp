// The interpreter of the language and compiled code give the same values, and compiled derivatives are
// the slopes of the interpreter's values: random expressions as text, through the whole compiler.
#include <catch2/catch.hpp>
#include <cmath>
#include <deque>
#include <fmt/format.h>

#include "compiler/lower/lower.h"
#include "compiler/passes/pipeline.h"
#include "tests/unit/compiler/codegen/compiled.h"
#include "tests/unit/compiler/jit/scratch.h"
#include "tests/unit/compiler/support/reference.h"
#include "tests/unit/compiler/whole/random_expression.h"
#include "tests/unit/compiler/whole/text_model.h"

using namespace tarn;
using namespace tarn::test;

namespace {

constexpr std::size_t kPoints = 23;  // no multiple of any number of lanes

/// A qubit whose X, Y, Z and I have random coefficients.
std::string model_of(unsigned seed) {
  ExpressionWriter schedules(seed, false), driven(seed + 1000, true);
  std::string text = kDeclarations;
  text += fmt::format("schedule f0(s) = {}\nschedule f1(s) = {}\n", schedules.number(5), schedules.number(6));
  text += fmt::format("qubit site {{ energy f0(s)*1 GHz*X + f1(s)*1 GHz*Y\n energy ({})*1 GHz*Z energy ({})*1 GHz*I }}\n",
                      schedules.number(4), driven.number(5));
  return text + "chip one { qubit q : site }\nexperiment run { chip one begin state(\"0\") pace hold for 1 ns "
                "equation schroedinger observe z = mean(Z(q)) at end }\n";
}

/// The graph with every real result multiplied by 1 + d, |d| <= size at random: what roundings may do.
struct Disturbed {
  Graph graph;
  std::vector<NodeId> to;
};

Disturbed disturbed(const Graph& graph, double size, unsigned seed) {
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> spread(-size, size);
  Disturbed result;
  result.graph.tables = graph.tables;
  const auto push = [&](const Node& node) {
    result.graph.nodes.push_back(node);
    return NodeId{static_cast<std::uint32_t>(result.graph.nodes.size() - 1)};
  };
  for (Node node : graph.nodes) {
    const int operands = operand_count(node.op);
    if (operands > 0) node.a = result.to[node.a.row];
    if (operands > 1) node.b = result.to[node.b.row];
    if (operands > 2) node.c = result.to[node.c.row];
    NodeId id = push(node);
    if (operands > 0 && !node.truth) {
      const NodeId factor = push({.op = NodeOp::constant, .number = 1 + spread(random)});
      id = push({.op = NodeOp::mul, .a = id, .b = factor});
    }
    result.to.push_back(id);
  }
  return result;
}

/// Values of one node, and how far roundings of a part in 1e13 at every step move them.
class Expected {
 public:
  Expected(const Graph& graph, NodeId node) : node_(node), exact_(graph, {node}) {
    for (unsigned k = 0; k < 4; ++k) {
      others_.push_back(disturbed(graph, 1e-13, k));
      samplers_.emplace_back(others_.back().graph, std::vector{others_.back().to[node.row]});
    }
  }
  double value(const Bindings& at) {
    exact_.run(at);
    return exact_.value(node_);
  }
  double tolerance(const Bindings& at) {
    const double wanted = value(at);
    double most = 0;
    for (std::size_t k = 0; k < others_.size(); ++k) {
      samplers_[k].run(at);
      most = std::max(most, std::abs(samplers_[k].value(others_[k].to[node_.row]) - wanted));
    }
    return 2 * most + 1e-14 * std::abs(wanted);
  }

 private:
  NodeId node_;
  Sampler exact_;
  std::deque<Disturbed> others_;  // samplers point into them
  std::deque<Sampler> samplers_;
};

struct Slope {
  double value, error;
};

/// Central differences at three steps, extrapolated twice to step zero; where a kink is near, the two
/// extrapolations differ.
Slope slope_of(Expected& expected, Bindings at) {
  const double s = at.s;
  const auto central = [&](double step) {
    at.s = s + step;
    const double right = expected.value(at);
    at.s = s - step;
    return (right - expected.value(at)) / (2 * step);
  };
  const double step = 4e-4;
  const double wide = central(step), middle = central(step / 2), narrow = central(step / 4);
  const double coarse = (4 * middle - wide) / 3, fine = (4 * narrow - middle) / 3;
  return {fine, std::abs(fine - coarse)};
}

/// One expression: the row of set kCoefficients and the node that it was.
struct Traced {
  std::uint32_t row;
  NodeId node;
  double factor;  ///< node = factor * row
};

/// Each word of the qubit has one term. Optimisation may put constant factors into the words.
std::vector<Traced> traced(const Instance& instance, const ir::Module& module) {
  std::vector<Traced> result;
  for (const EnergyTerm& term : instance.energy) {
    for (const OperatorTerm& part : term.op) {
      for (const auto& group : module.generators[runtime::kHamiltonian].sum.groups) {
        for (const auto& word : group.terms) {
          if (word.word.x != part.word.x || word.word.z != part.word.z) continue;
          result.push_back({group.coefficient, part.coefficient, (word.factor / part.factor).real()});
        }
      }
    }
  }
  return result;
}

struct Tally {
  std::size_t values = 0, sharp = 0, slopes = 0, kinks = 0;
};

void compare(const TextModel& model, const ir::Module& module, const runtime::Kernel& kernel, unsigned seed, Tally& tally) {
  const Instance& instance = model.instance;
  runtime::InputBlock block(kernel, numbers_of(module));
  std::mt19937 random(seed);
  std::uniform_real_distribution<double> unit(0, 1);
  Bindings at;
  for (const ParameterUse& parameter : instance.parameters) {
    at.parameters.push_back(*parameter.lowest + unit(random) * (*parameter.highest - *parameter.lowest));
    block.set(static_cast<std::uint32_t>(at.parameters.size() - 1), at.parameters.back());
  }
  block.set(static_cast<std::uint32_t>(at.parameters.size()), 1);  // offsets are on
  std::vector<double> s(kPoints), t(kPoints), values(kernel.rows(0) * kPoints), slopes(kernel.rows(0) * kPoints);
  for (std::size_t p = 0; p < kPoints; ++p) s[p] = unit(random), t[p] = 10 * unit(random);
  REQUIRE(kernel.values(0)(block.block(), kPoints, s.data(), t.data(), s.data(), values.data()) == TARN_OK);
  REQUIRE(kernel.derivatives(0)(block.block(), kPoints, s.data(), t.data(), s.data(), slopes.data()) == TARN_OK);
  for (const Traced& row : traced(instance, module)) {
    Expected expected(instance.graph, row.node);
    for (std::size_t p = 0; p < kPoints; ++p) {
      at.s = s[p];
      at.t = t[p];
      INFO("row " << row.row << ", s = " << s[p] << ", t = " << t[p]);
      const double tolerance = expected.tolerance(at);
      const double value = row.factor * values[row.row * kPoints + p];
      CHECK(std::abs(value - expected.value(at)) <= tolerance);
      ++tally.values;
      if (tolerance <= 3e-12 * std::max(1.0, std::abs(value))) ++tally.sharp;
      const Slope slope = slope_of(expected, at);
      if (slope.error > 1e-4 * (1 + std::abs(slope.value))) {
        ++tally.kinks;
        continue;
      }
      CHECK(std::abs(row.factor * slopes[row.row * kPoints + p] - slope.value) <=
            20 * slope.error + 1e-7 * (1 + std::abs(slope.value)) + 1e5 * tolerance);
      ++tally.slopes;
    }
  }
}

}  // namespace

TEST_CASE("interpreter and compiled code agree on random expressions, and on their slopes", "[whole]") {
  const Scratch folder;
  write_file(folder.path("tables.csv"), kTables);
  Tally tally;
  for (unsigned seed = 1; seed <= 40; ++seed) {
    const std::string text = model_of(seed);
    INFO("seed " << seed << "\n" << text);
    const TextModel model = text_model(text, folder.path());
    const ir::Module module = compiler::optimize(compiler::lower(model.instance, model.sources()).module);
    const runtime::Kernel kernel = compiled(module);
    for (unsigned draw = 0; draw < 2; ++draw) compare(model, module, kernel, seed * 8 + draw, tally);
  }
  CHECK(tally.values > 5000);
  CHECK(tally.sharp > tally.values - tally.values / 10);
  CHECK(tally.slopes > 20 * tally.kinks);
}

TEST_CASE("a schedule's table is read at whole numbers", "[whole]") {
  const Scratch folder;
  write_file(folder.path("t.csv"), "x,y\n0,0.5\n1,2\n");
  const TextModel model = text_model("schedule A(s) = table(\"t.csv\", \"x\", \"y\")\n"
                                     "qubit site { energy A(1)*1 GHz*X + A(0)*1 GHz*Z }\nchip one { qubit q : site }\n"
                                     "experiment run { chip one scan s over linear(0, 1, 3) observe gap }\n",
                                     folder.path());
  REQUIRE(model.instance.energy.size() == 1);
  REQUIRE(model.instance.energy[0].op.size() == 2);
  for (const OperatorTerm& term : model.instance.energy[0].op) {
    const double wanted = (term.word.x == 1 ? 2 : 0.5) * 2 * std::acos(-1.0);
    CHECK(term.factor.real() * evaluate(model.instance.graph, term.coefficient, {}) == Approx(wanted).epsilon(1e-15));
  }
}
