#pragma once
/// \file Which declaration a `##` comment documents.

#include "lang/source/source_set.h"
#include "lang/syntax/ast.h"

namespace tarn {

/// Fills `doc` of the declarations: a `##` comment belongs to the declaration of its
/// line, where there is none to the next. An argument has its own where it stands on
/// another line than its declaration's first.
void attach_docs(Ast& ast, const SourceFile& file);

}  // namespace tarn
