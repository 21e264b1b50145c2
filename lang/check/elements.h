#pragma once
/// \file Kinds of qubits and couplers, their terms, and baths.

#include <string>
#include <vector>

#include "lang/check/chip.h"

namespace tarn {

/// Where a term belongs.
struct TermPlace {
  Unrolled& unrolled;
  std::string where;  ///< q[0], q[0] -- q[1], or `chip`.
};

void elaborate_energy(Session& session, const Scope& scope, const ast::EnergyTerm& term, const TermPlace& place);
void elaborate_jump(Session& session, const Scope& scope, const ast::JumpTerm& term, const TermPlace& place);
void elaborate_noise(Session& session, const Scope& scope, const ast::NoiseTerm& term, const TermPlace& place);

/// Terms of a kind placed on the qubits `ends`.
void elaborate_kind(Session& session, const Callable& kind, const std::vector<std::uint32_t>& ends,
                    const TermPlace& place, Span span);

/// Row of Unrolled::baths; nothing if the bath is not fully known or has errors.
std::optional<std::uint32_t> elaborate_bath(Session& session, const Callable& bath, Unrolled& unrolled, Span span);

/// Generic checks: arguments opaque. Lines for the dump of the program.
std::vector<std::string> check_kind(Session& session, const Callable& kind);
void check_bath(Session& session, const Callable& bath);

/// Warns of noise statements of one kind or chip that join the same operator to the same bath.
void warn_of_repeated_noise(Session& session, const std::vector<const ast::NoiseTerm*>& terms, const Scope& scope);

}  // namespace tarn
