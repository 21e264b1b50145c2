#include <algorithm>
#include <array>
#include <cmath>

#include "lang/check/arithmetic.h"
#include "lang/check/expression.h"

namespace tarn {
namespace {

enum class Rule : std::uint8_t { plain, from_angle, to_angle, root, keeps };

struct Elementary {
  std::string_view name;
  NodeOp op;
  Rule rule;
};

constexpr std::array kUnary = std::to_array<Elementary>({
    {"exp", NodeOp::exp, Rule::plain},      {"ln", NodeOp::ln, Rule::plain},
    {"log10", NodeOp::log10, Rule::plain},  {"sqrt", NodeOp::sqrt, Rule::root},
    {"sin", NodeOp::sin, Rule::from_angle}, {"cos", NodeOp::cos, Rule::from_angle},
    {"tan", NodeOp::tan, Rule::from_angle}, {"asin", NodeOp::asin, Rule::to_angle},
    {"acos", NodeOp::acos, Rule::to_angle}, {"atan", NodeOp::atan, Rule::to_angle},
    {"sinh", NodeOp::sinh, Rule::plain},    {"cosh", NodeOp::cosh, Rule::plain},
    {"tanh", NodeOp::tanh, Rule::plain},    {"abs", NodeOp::abs, Rule::keeps},
    {"floor", NodeOp::floor, Rule::plain},
});

struct Several {
  std::string_view name;
  std::size_t fewest, most;
};
constexpr std::array kSeveral = std::to_array<Several>(
    {{"min", 2, 64}, {"max", 2, 64}, {"mod", 2, 2}, {"clamp", 3, 3}});

const Elementary* find_unary(std::string_view name) {
  for (const Elementary& function : kUnary) {
    if (function.name == name) return &function;
  }
  return nullptr;
}

bool arguments_fit(Session& session, std::string_view name, std::size_t fewest, std::size_t most, std::size_t given,
                   Span span) {
  if (given >= fewest && given <= most) return true;
  const std::string wanted = fewest == most ? fmt::format("{} argument{}", fewest, fewest == 1 ? "" : "s") : fmt::format("at least {} arguments", fewest);
  session.report(span, diag::argument_count, std::string(name), wanted, given);
  return false;
}

Value call_unary(Session& session, const Elementary& function, const Operand& argument, Span span) {
  const auto* count = argument.value.get<CountValue>();
  if (count != nullptr && count->value && function.op == NodeOp::abs && *count->value != INT64_MIN) {
    return count_value(std::abs(*count->value));
  }
  const auto x = to_number(session, argument.value, argument.span);
  if (!x) return {};
  const Dimension found = session.graph[*x].dimension;
  Dimension result = kNumber;
  if (function.rule == Rule::plain || function.rule == Rule::to_angle) {
    if (!require_dimension(session, *x, kNumber, argument.span)) return {};
    if (function.rule == Rule::to_angle) result = kAngle;
  }
  if (function.rule == Rule::from_angle && !require_dimension(session, *x, kAngle, argument.span)) return {};
  if (function.rule == Rule::root) result = pow(found, Rational::of(1, 2));
  if (function.rule == Rule::keeps) result = found;
  return make_number(session, function.op, *x, {}, result, span);
}

bool all_counts(const std::vector<Operand>& arguments) {
  for (const Operand& argument : arguments) {
    const auto* count = argument.value.get<CountValue>();
    if (count == nullptr || !count->value) return false;
  }
  return true;
}

/// Integers stay integers: min, max, clamp, mod of known counts.
std::optional<std::int64_t> of_counts(std::string_view name, const std::vector<Operand>& arguments) {
  std::vector<std::int64_t> x;
  for (const Operand& argument : arguments) x.push_back(*argument.value.get<CountValue>()->value);
  if (name == "min") return *std::min_element(x.begin(), x.end());
  if (name == "max") return *std::max_element(x.begin(), x.end());
  if (name == "clamp") return std::min(std::max(x[0], x[1]), x[2]);
  if (x[1] <= 0) return std::nullopt;
  return ((x[0] % x[1]) + x[1]) % x[1];
}

Value call_several(Session& session, std::string_view name, const std::vector<Operand>& arguments, Span span) {
  if (all_counts(arguments)) {
    if (const auto count = of_counts(name, arguments)) return count_value(*count);
  }
  std::vector<NodeId> x;
  for (const Operand& argument : arguments) {
    const auto node = to_number(session, argument.value, argument.span);
    if (!node) return {};
    if (!x.empty() && !require_dimension(session, *node, session.graph[x[0]].dimension, argument.span)) return {};
    x.push_back(*node);
  }
  const Dimension dimension = session.graph[x[0]].dimension;
  const auto join = [&](NodeOp op, NodeId a, NodeId b) {
    return session.graph.add({.op = op, .a = a, .b = b, .dimension = dimension, .span = span});
  };
  if (name == "mod") return make_number(session, NodeOp::mod, x[0], x[1], dimension, span);
  if (name == "clamp") return number_value(join(NodeOp::min, join(NodeOp::max, x[0], x[1]), x[2]));
  NodeId result = x[0];
  for (std::size_t k = 1; k < x.size(); ++k) result = join(name == "min" ? NodeOp::min : NodeOp::max, result, x[k]);
  return number_value(result);
}

}  // namespace

bool is_function(std::string_view name) {
  if (find_unary(name) != nullptr) return true;
  return std::any_of(kSeveral.begin(), kSeveral.end(), [&](const Several& f) { return f.name == name; });
}

Value call_function(Session& session, std::string_view name, const std::vector<Operand>& arguments, Span span) {
  const Elementary* unary = find_unary(name);
  std::size_t fewest = 1;
  std::size_t most = 1;
  for (const Several& function : kSeveral) {
    if (function.name != name) continue;
    fewest = function.fewest;
    most = function.most;
  }
  if (!arguments_fit(session, name, fewest, most, arguments.size(), span)) return {};
  for (const Operand& argument : arguments) {
    if (argument.value.unknown()) return {};
  }
  return unary != nullptr ? call_unary(session, *unary, arguments[0], span)
                          : call_several(session, name, arguments, span);
}

}  // namespace tarn
