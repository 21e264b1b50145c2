#pragma once
/// \file A claim's truth node taken apart into comparisons, so that margins can be reported.

#include "compiler/lower/experiment.h"

namespace tarn::compiler {

/// Conjunctions, disjunctions and negations become tree nodes; a comparison names both sides as
/// rows of set kClaims; any other truth (a conditional, say) is one row of its own.
runtime::ClaimNode claim_tree(const Graph& graph, NodeId claim, const ExperimentRows& rows);

}  // namespace tarn::compiler
