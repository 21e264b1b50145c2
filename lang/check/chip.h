#pragma once
/// \file Chips unrolled: places, nested chips, couplers, terms.

#include <cstdint>
#include <map>
#include <optional>
#include <set>
#include <string>
#include <tuple>
#include <vector>

#include "lang/check/session.h"

namespace tarn {

/// What unrolling collects. Operators have qubit q at bit q until finish() turns them round.
struct Unrolled {
  std::vector<InstanceQubit> qubits;
  std::vector<NodeId> qubit_s;  ///< The s that each qubit's kind sees.
  std::map<std::string, std::uint32_t> places;
  std::set<std::tuple<const ast::Item*, std::uint32_t, std::uint32_t>> couplers;
  std::vector<EnergyTerm> energy;
  std::vector<NoiseTerm> noise;
  std::vector<CorrelationI> correlations;
  std::vector<JumpTerm> jumps;
  std::vector<InstanceBath> baths;
  std::size_t placements = 0;
};

/// A chip being unrolled, or one whose places an experiment names.
struct ChipFrame {
  std::string prefix;              ///< Path of a nested chip with its dot: `cell[0].`
  Unrolled* unrolled = nullptr;
  std::set<std::string> roots{};   ///< Names of places declared; used where indices are unknown.
};

/// Unrolls a chip with its arguments bound.
void unroll_chip(Session& session, const Callable& chip, const std::string& prefix, Unrolled& unrolled, Span span);

/// Checks a chip, qubit kind, coupler kind or bath by itself with opaque arguments; precondition:
/// a generic session.
void check_chip(Session& session, const Callable& chip);

/// Qubit that a path names; reports an unknown place. Nothing where indices are not known.
std::optional<std::uint32_t> find_qubit(Session& session, const Scope& scope, const ast::Path& path);

}  // namespace tarn
