#include "compiler/passes/pipeline.h"

#include <string>

#include "compiler/ir/verify.h"
#include "compiler/passes/differentiate.h"
#include "compiler/passes/fold.h"
#include "compiler/passes/group.h"
#include "compiler/passes/share.h"
#include "compiler/passes/structure.h"
#include "lang/support/check.h"

namespace tarn::compiler {

using ir::Module;

namespace {

#ifdef TARN_VERIFY
constexpr bool kVerify = true;
#else
constexpr bool kVerify = false;
#endif

Module checked(std::string_view pass, Module module) {
  if (!kVerify) return module;
  const auto broken = ir::verify(module);
  if (!broken.empty()) throw InternalError("after " + std::string(pass) + ": " + broken.front());
  return module;
}

}  // namespace

Module optimize(const Module& module) {
  Module work = checked("lowering", module);
  for (auto& set : work.sets) set.derivatives.clear();
  work = checked("fold", fold(work));
  work = checked("share", share(work));
  work = checked("group", group(work));
  work = checked("differentiate", differentiate(work));
  work = checked("fold", fold(work));
  work = checked("share", share(work));
  return checked("structure", find_structure(std::move(work)));
}

}  // namespace tarn::compiler
