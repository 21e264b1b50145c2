#pragma once
/// \file Recognises the form of a spectral density by its structure, never by a name.
///
/// A density is taken apart into a sum; each summand into factors. What is a product of powers of
/// w, exp(-w/cutoff), 1/(1 + (w/cutoff)^2), 1/((w^2 - c^2)^2 + (width w)^2) or one table of w, times
/// anything that does not depend on w, gets its closed form; the rest is left to quadrature.

#include <functional>
#include <optional>
#include <vector>

#include "lang/program/graph.h"
#include "runtime/plan/plan.h"

namespace tarn::compiler {

/// Adds nodes to `graph` for the parameters of each form; `row` gives a node its settings row.
using SettingRow = std::function<std::uint32_t(NodeId)>;

/// Parameters of one recognised summand, as nodes of the graph.
struct RecognisedPowerLaw { NodeId strength, cutoff, exponent; };
struct RecognisedDrude { NodeId strength, cutoff; };
struct RecognisedPeak { NodeId strength, centre, width; };
struct RecognisedTable { NodeId scale; std::uint32_t table; };
using RecognisedSpectrum =
    std::variant<RecognisedPowerLaw, RecognisedDrude, RecognisedPeak, RecognisedTable>;

/// The summands of J(w) in closed form, or nothing if one of them has none. May append nodes.
std::optional<std::vector<RecognisedSpectrum>> recognise_spectrum(Graph& graph, NodeId density);

}  // namespace tarn::compiler
