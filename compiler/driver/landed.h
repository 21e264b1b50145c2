#pragma once
/// \file Statements that the language knows and no run carries out yet.

#include <span>

#include "lang/diagnostics/diagnostics.h"
#include "lang/program/instance.h"

namespace tarn::compiler {

/// Reports each of them as `not_available`.
void refuse_not_landed(std::span<const Instance> instances, Diagnostics& diagnostics);

}  // namespace tarn::compiler
