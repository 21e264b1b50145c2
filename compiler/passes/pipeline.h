#pragma once
/// \file The order of the passes.

#include <string_view>

#include "compiler/ir/module.h"

namespace tarn::compiler {

/// Part of every cache key: changes whenever the passes or their order do.
inline constexpr std::string_view kPipelineName = "fold share group differentiate structure 1";

/// fold, share, group, differentiate, fold, share, find_structure.
/// With TARN_VERIFY each pass's result is verified; a broken rule is an InternalError that names it.
/// Precondition: verify() finds nothing.
ir::Module optimize(const ir::Module& module);

}  // namespace tarn::compiler
