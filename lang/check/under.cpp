#include <algorithm>

#include "lang/check/expression.h"
#include "lang/check/path.h"
#include "lang/check/readings.h"
#include "lang/check/remedies.h"

namespace tarn {

Value evaluate_under(Session& session, const Scope& scope, const ast::Use& use) {
  const ast::Name& label = *use.under;
  Readings* readings = scope.site != nullptr ? scope.site->readings : nullptr;
  if (readings == nullptr || !readings->claims) {
    session.report(label.span, diag::name_not_here, "under", scope.site != nullptr ? scope.site->where : "here")
        .remedy("`observe` it for every equation, and compare in `expect`");
    return {};
  }
  Instance& instance = *readings->instance;
  const auto chosen = std::find_if(instance.equations.begin(), instance.equations.end(),
                                   [&](const EquationI& equation) { return instance.compares && equation.label == label.text; });
  if (chosen == instance.equations.end()) {
    std::vector<std::string> labels;
    for (const EquationI& equation : instance.equations) labels.push_back(equation.label);
    session.report(label.span, diag::unknown_label, label.text)
        .remedy(instance.compares ? offer(label.text, labels, "there is") : "`equation each of (davies, redfield)` compares equations");
    return {};
  }
  const Value value = evaluate_path(session, scope, use.path);
  if (value.unknown()) return {};
  const auto* number = value.get<NumberValue>();
  const auto* verdict = value.get<VerdictValue>();
  const Node* node = number != nullptr ? &session.graph[number->node] : verdict != nullptr ? &session.graph[verdict->node] : nullptr;
  if (node == nullptr || node->op != NodeOp::observable) {
    session.report(use.path.span, diag::wrong_kind, "the name of an observable", fmt::format("`{}`", excerpt(session, use.path.span)));
    return {};
  }
  const UnderI wanted{static_cast<std::uint32_t>(chosen - instance.equations.begin()), node->index};
  const auto known = std::find(instance.under.begin(), instance.under.end(), wanted);
  const auto row = static_cast<std::uint32_t>(known - instance.under.begin());
  if (known == instance.under.end()) instance.under.push_back(wanted);
  const NodeId made = session.graph.add({.op = NodeOp::under, .index = row, .dimension = node->dimension, .span = cover(use.path.span, label.span)});
  return verdict != nullptr ? Value{VerdictValue{made}} : number_value(made);
}

}  // namespace tarn
