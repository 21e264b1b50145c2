#pragma once
/// \file Instance -> IR and plan. Checked input: cannot fail.
///
/// Module and plan come from one walk, because the plan names functions by the rows that the walk
/// gives them.

#include "compiler/ir/module.h"
#include "lang/program/instance.h"
#include "lang/source/source_set.h"
#include "runtime/plan/plan.h"

namespace tarn::compiler {

struct Lowered {
  ir::Module module;   ///< Not yet optimised; sets and generators as runtime/plan/plan.h numbers them.
  runtime::Plan plan;  ///< Of `each of`, the first equation's.
};

/// The Liouvillian is made where the equation is `lindblad`; lane entries are asked for where the
/// system is small enough that one point would waste the vector unit.
Lowered lower(Instance instance, const SourceSet& sources);

/// `each of`: a plan for each of the equations compared, in their order, all for one kernel; else the plan alone.
std::vector<runtime::Plan> plan_of_each(const runtime::Plan& plan);

}  // namespace tarn::compiler
