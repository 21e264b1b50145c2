#pragma once
/// \file What an experiment measures: population, mean, gap ... as nodes.

#include <map>
#include <string>
#include <vector>

#include "lang/check/chip.h"

namespace tarn {

/// What observables and claims of one experiment share.
struct Readings {
  Unrolled* unrolled = nullptr;
  std::vector<ReadingI>* rows = nullptr;
  std::vector<ObservableI>* observables = nullptr;
  std::map<std::string, std::uint32_t> by_name{};  ///< Observables so far.
  std::map<std::string, Span> broken{};            ///< Those with an error, which was reported.
  bool claims = false;       ///< In `expect`: only reductions and observables, nothing new is measured.
  bool reads_state = false;  ///< Set by what is evaluated: needs `begin`, and an equation where there is a pace.
  bool reads_levels = false;
  bool reduces = false;
  bool pace_broken = false;  ///< The pace has an error, which was reported.
  bool scans = false;        ///< The experiment is a scan: every observable has a value at each s.
};

/// population, mean, E, gap ... and the words of the language that are not yet available.
bool is_reading_word(std::string_view name);
Value evaluate_reading(Session& session, const Scope& scope, const ast::Path& path);

/// A state written by letters, one for each qubit, each one of `allowed`; nothing if reported.
std::optional<std::string> state_letters(Session& session, const Scope& scope, const ast::Path& path,
                                         std::size_t qubits, std::string_view allowed);

}  // namespace tarn
