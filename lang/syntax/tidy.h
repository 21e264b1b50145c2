#pragma once
/// \file One layout for all texts: `tarn tidy`.
///
/// A statement a line, blocks indented by four, one space where the text has any, at
/// most one empty line between statements. Kept from the text: every comment, empty
/// lines, line breaks inside a statement, and a block on one line that fits there.
///
///     parameter ta=100 ns   in 1 ns..1 ms ## anneal time
///     parameter ta = 100 ns in 1 ns .. 1 ms  ## anneal time

#include <optional>
#include <string>

#include "lang/diagnostics/diagnostics.h"
#include "lang/source/source_set.h"

namespace tarn {

/// Widest line that a block on one line may take.
inline constexpr std::size_t kTidyWidth = 110;

/// The text laid out anew: the same words, numbers and symbols in the same order, so that
/// it means the same; tidying the result changes nothing. Nothing if the text has errors,
/// which are reported.
std::optional<std::string> tidy(const SourceFile& file, Diagnostics& diagnostics);

}  // namespace tarn
