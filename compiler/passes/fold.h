#pragma once
/// \file Computes what is constant and drops what changes nothing.

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Operations on constants become constants, and identities that hold to the last bit are applied:
/// x+0, x-0, 1x, x/1, x/2^k, pow(x,1), pow(x,2), --x, -1 x, x+(-y), not not p, p and true, select
/// of a constant or of one value twice. (The sign of a zero may change.) x*0 stays, since x may
/// be infinite; results that are not finite are not folded, so that they are reported when met.
///
///     %0 = constant 2                     %0 = constant 2
///     %1 = constant 3                     %1 = constant 3
///     %2 = mul %0 %1                      %2 = constant 6
///     %3 = argument s                     %3 = argument s
///     %4 = pow %3 %0           becomes    %4 = mul %3 %3
///     %5 = div %4 %0                      %5 = constant 0.5
///                                         %6 = mul %4 %5
ir::Module fold(const ir::Module& module);

}  // namespace tarn::compiler
