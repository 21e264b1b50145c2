#pragma once
/// \file Expressions and operators as text, for dumps.

#include <functional>
#include <string>

#include "lang/program/instance.h"

namespace tarn {

/// Names of what a graph reads by index.
struct GraphNames {
  std::function<std::string(std::uint32_t)> parameter;
};

/// In internal units, fully bracketed where precedence asks for it: `-0.5*(A*(1 - s)^2)`.
std::string to_text(const Graph& graph, NodeId id, const GraphNames& names);

/// `-0.5 * (coefficient) Z(1) + ...`; qubits counted from 0 in the order placed. Bits as in an
/// Instance: qubit q of n is bit n-1-q.
std::string to_text(const Graph& graph, const Operator& op, std::uint32_t qubits, const GraphNames& names);

}  // namespace tarn
