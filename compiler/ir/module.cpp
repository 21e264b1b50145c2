#include "compiler/ir/module.h"

#include "lang/support/check.h"

namespace tarn::ir {

ValueId append(Module& module, Op op, Type type) {
  const auto row = static_cast<std::uint32_t>(module.values.size());
  for_each_operand(op, [&](ValueId operand) { TARN_CHECK(operand.row < row); });
  module.values.push_back({op, type});
  return {row};
}

}  // namespace tarn::ir
