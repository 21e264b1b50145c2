#pragma once
/// \file Which declaration a `##` comment documents.

#include <optional>
#include <vector>

#include "lang/source/source_set.h"
#include "lang/syntax/ast.h"

namespace tarn {

/// For each comment the declaration it documents; nothing for a plain comment, or where
/// no declaration follows.
std::vector<std::optional<Span>> documented(Ast& ast, const SourceFile& file);

/// Fills `doc` of the declarations: a `##` comment belongs to the declaration of its
/// line, where there is none to the next. An argument has its own where it stands on
/// another line than its declaration's first.
void attach_docs(Ast& ast, const SourceFile& file);

}  // namespace tarn
