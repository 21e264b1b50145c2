#include "lang/check/samples.h"

#include <cmath>

#include "lang/quantities/constants.h"

namespace tarn {
namespace {

Bindings at_defaults(const Session& session) {
  Bindings bindings;
  for (const ParameterUse& use : session.parameters) bindings.parameters.push_back(use.value);
  return bindings;
}

/// The first row that is not finite though all before it are.
std::optional<NodeId> first_bad(const Graph& graph, const Sampler& sampler) {
  for (const std::uint32_t row : sampler.rows()) {
    if (graph.nodes[row].truth) continue;
    if (!std::isfinite(sampler.value(NodeId{row}))) return NodeId{row};
  }
  return std::nullopt;
}

/// A branch that is not taken may be anything: only roots decide.
bool all_finite(const Sampler& sampler, const std::vector<NodeId>& roots) {
  for (const NodeId root : roots) {
    if (!std::isfinite(sampler.value(root))) return false;
  }
  return true;
}

}  // namespace

bool is_known(const Session& session, NodeId node) {
  const Dependence reads = dependence(session.graph, node);
  if (reads.readings || reads.observables) return false;
  for (const std::uint32_t index : reads.parameters) {
    if (index >= session.parameters.size() || std::isnan(session.parameters[index].value)) return false;
  }
  return true;
}

std::optional<double> value_at_defaults(const Session& session, NodeId node) {
  if (!is_known(session, node)) return std::nullopt;
  return evaluate(session.graph, node, at_defaults(session));
}

void report_not_finite_in_s(Session& session, const std::vector<NodeId>& nodes) {
  std::vector<NodeId> known;
  for (const NodeId node : nodes) {
    if (is_known(session, node)) known.push_back(node);
  }
  if (known.empty()) return;
  Sampler sampler(session.graph, known);
  Bindings bindings = at_defaults(session);
  for (int k = 0; k < kScheduleSamples; ++k) {
    bindings.s = static_cast<double>(k) / (kScheduleSamples - 1);
    bindings.t = 0.37 * k;
    sampler.run(bindings);
    if (all_finite(sampler, known)) continue;
    const auto bad = first_bad(session.graph, sampler);
    const Span span = session.graph[bad.value_or(known.front())].span;
    session.report(span, diag::not_finite_at, excerpt(session, span), bindings.s);
    return;
  }
}

void report_bad_density(Session& session, NodeId density, Span span) {
  if (!is_known(session, density)) return;
  Sampler sampler(session.graph, {density});
  Bindings bindings = at_defaults(session);
  constexpr int kSamples = 201;
  for (int k = 0; k < kSamples; ++k) {
    bindings.w = 1e-6 * std::pow(10.0, 10.0 * k / (kSamples - 1));
    sampler.run(bindings);
    const double value = sampler.value(density);
    if (std::isfinite(value) && value >= 0) continue;
    session.report(span, diag::bad_density, format_quantity(value, kFrequency), format_quantity(bindings.w, kFrequency));
    return;
  }
}

}  // namespace tarn
