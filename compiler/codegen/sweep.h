#pragma once
/// \file Compiled generators on plain vectors: apply.
///
/// apply walks the output in register blocks of up to 8 vectors. Flips of the lowest bits are
/// shuffles of a register, of the next ones another register of the block, of the rest a load from
/// another block. Flips with one common coefficient are added first and multiplied once. Real and
/// imaginary parts of the generator are summed apart, so a real generator, or -i times one, costs
/// real arithmetic only.

#include "compiler/codegen/sweep_plan.h"
#include "compiler/codegen/unit.h"

namespace tarn::compiler {

/// A tarn_apply_fn on 2^bits interleaved complex amplitudes.
llvm::Function* emit_apply(Unit& unit, const SweepPlan& plan, const std::string& name);

/// The vector width [doubles] of a generator's sweeps: that of the unit, less for very few bits.
unsigned sweep_width(const Unit& unit, std::uint32_t bits);

}  // namespace tarn::compiler
