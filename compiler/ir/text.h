#pragma once
/// \file The text form of a Module: canonical, exact, and what crosses into the code generator.
///
///     tarn-ir 1
///     module "ring"
///     input "ta"
///     table "curve" pieces 2
///     knots 0 0.5 1
///     c0 1 2 c1 2 2 c2 0 0 c3 0 0
///     %0 = argument s
///     %1 = table 0 %0 order 0 hold
///     set "coefficients" differentiate
///     function "B" %1
///     generator "H" bits 2 real
///     group 0
///     term 0.5 0 x 1 z 0
///
/// Numbers are written with the fewest decimal digits that give the same double back; masks are
/// hexadecimal. A table without `knots` stands for its shape alone: see shape_only().

#include <string>
#include <string_view>

#include "compiler/ir/module.h"
#include "lang/support/result.h"

namespace tarn::ir {

/// Where a text is not a Module, and why. Lines count from 1.
struct TextError {
  std::size_t line = 0;
  std::string message;
};

/// from_text(to_text(m)) is m, and to_text(from_text(t)) is t for every t that to_text made.
std::string to_text(const Module& module);

/// The same text with comments that say what the numbers mean; from_text reads it too.
std::string print(const Module& module);

/// Reads one Module. The result is well formed as text; verify() says whether it is sound.
Result<Module, TextError> from_text(std::string_view text);

/// The Module with placeholders for the numbers of its tables (knots 0, 1, 2 ... and zeros), which
/// are inputs of the kernel and shape no code: models that differ in them share one object.
Module shape_only(Module module);

}  // namespace tarn::ir
