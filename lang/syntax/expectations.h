#pragma once
/// \file From "the grammar stopped at this token" to a message in the user's words.

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/source_set.h"
#include "lang/syntax/nodes.h"

namespace tarn {

void report_failure(const SourceFile& file, const Tokens& tokens, const Failure& failure, Diagnostics& diagnostics);

/// Reports a block without its `}`.
void report_open_block(const SourceFile& file, const Tokens& tokens, const OpenBlock& block, Diagnostics& diagnostics);

}  // namespace tarn
