#pragma once
/// \file Derivatives with respect to s.

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Fills `derivatives` of every set that asks for them. Derivatives that exist are made anew.
///
/// At a kink (abs, min, max, mod, floor, a select) the derivative is the right one, found from the
/// derivatives of what is compared; the one exception is a table read at a knot through an x that
/// falls with s, which gives the piece to the right in x. Where the inner derivative is 0 the
/// result is 0 even if the outer one is infinite (sqrt, ln, pow at 0), so that no 0 times infinity
/// becomes a NaN. At the last knot of a table the last piece counts. t and w do not depend on s.
///
///     set "c" differentiate               %0 = argument s
///     %0 = argument s                     %1 = mul %0 %0
///     %1 = mul %0 %0           becomes    %2 = add %0 %0
///     function "f" %1                     function "f" %1 derivative %2
ir::Module differentiate(const ir::Module& module);

}  // namespace tarn::compiler
