#pragma once
/// \file Short names for rows that tests append to a module.

#include "compiler/ir/module.h"

namespace tarn::test {

inline ir::ValueId number(ir::Module& module, double value) { return append(module, ir::Constant{value}); }
inline ir::ValueId join(ir::Module& module, ir::BinaryOp op, ir::ValueId x, ir::ValueId y) {
  return append(module, ir::Binary{op, x, y});
}

}  // namespace tarn::test
