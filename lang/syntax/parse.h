#pragma once
/// \file Text to tree.

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/source_set.h"
#include "lang/syntax/ast.h"

namespace tarn {

/// Tree of the file. Errors are reported, several in one run: a statement that cannot
/// be read is left out (or kept up to where it makes sense) and reading goes on at the
/// next word that starts one. Takes time linear in the length of the text, whatever it
/// holds; recursion is bounded (tokens.h).
Ast parse(const SourceFile& file, Diagnostics& diagnostics);

}  // namespace tarn
