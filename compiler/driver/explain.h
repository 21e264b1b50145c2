#pragma once
/// \file An experiment as resolved, in words and numbers: what `tarn explain` shows.

#include <string>

#include "compiler/driver/prepare.h"
#include "lang/program/instance.h"

namespace tarn::compiler {

/// Qubits in the order of bit strings, every term with its value at three places of the anneal,
/// noise with the form its density was recognised as, levels along s and the smallest gap, the
/// structure the compiler found and what one application of H costs. At default parameters.
std::string explain(const Instance& instance, const Prepared& prepared, const EngineReport& report);

}  // namespace tarn::compiler
