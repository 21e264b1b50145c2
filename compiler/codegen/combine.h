#pragma once
/// \file Compiled stages: a weighted sum of vectors in one pass over them, then the generator.

#include "compiler/codegen/unit.h"

namespace tarn::compiler {

/// How the weights of a combination are laid out.
enum class Weights { one_each, per_lane };

/// argument = sum of weights[j] vectors[j]: an internal function of (doubles, count, weights,
/// vectors, argument), with code of its own for 1 to 13 vectors. More are added 13 at a time.
/// `width` divides the number of doubles; weights are per lane of a width-W vector or one each.
llvm::Function* emit_combine(Unit& unit, unsigned width, Weights weights, const std::string& name);

/// A tarn_stage_fn: `combine`, then `apply`. No vectors at all: TARN_BAD_ARGUMENT.
llvm::Function* emit_stage(Unit& unit, llvm::Function* combine, llvm::Function* apply, std::uint64_t doubles,
                           const std::string& name);

}  // namespace tarn::compiler
