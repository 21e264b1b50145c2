#pragma once
/// \file What an experiment measures: population, mean, gap ... as nodes.

#include <map>
#include <optional>
#include <string>
#include <vector>

#include "lang/check/chip.h"

namespace tarn {

/// What observables and claims of one experiment share.
struct Readings {
  Unrolled* unrolled = nullptr;
  Instance* instance = nullptr;  ///< Readings, observables and what stands `under` an equation are added to it.
  std::map<std::string, std::uint32_t> by_name{};  ///< Observables so far.
  std::map<std::string, Span> broken{};            ///< Those with an error, which was reported.
  bool claims = false;       ///< In `expect`: only reductions and observables, nothing new is measured.
  bool reads_state = false;  ///< Set by what is evaluated: needs `begin`, and an equation where there is a pace.
  bool reads_levels = false;
  bool reads_generator = false;  ///< Needs an equation, but no state.
  std::optional<Span> relaxation{};  ///< The first T1 or T2.
  bool reduces = false;
  bool moves = false;        ///< The pace moves or holds.
  bool pace_broken = false;  ///< The pace has an error, which was reported.
  bool scans = false;        ///< The experiment is a scan: every observable has a value at each s.
};

/// population, mean, E, gap ... and the words of the language that are not yet available.
bool is_reading_word(std::string_view name);
Value evaluate_reading(Session& session, const Scope& scope, const ast::Path& path);

/// `node` stands for what was observed as `value`: a verdict if that is one, else a number.
Value observed_value(const Graph& graph, const Readings& readings, NodeId value, NodeId node);

/// `success under label`, of an observable in a claim.
Value evaluate_under(Session& session, const Scope& scope, const ast::Use& use);

/// A state written by letters, one for each qubit, each one of `allowed`; nothing if reported.
std::optional<std::string> state_letters(Session& session, const Scope& scope, const ast::Path& path,
                                         std::size_t qubits, std::string_view allowed);

}  // namespace tarn
