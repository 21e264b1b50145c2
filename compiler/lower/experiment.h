#pragma once
/// \file The experiment of an instance as a plan; its chip is added by lower().

#include <functional>

#include "lang/program/instance.h"
#include "lang/source/source_set.h"
#include "runtime/plan/plan.h"

namespace tarn::compiler {

/// How the walk over the experiment names what it finds in the kernel.
struct ExperimentRows {
  std::function<std::uint32_t(runtime::SetIndex, NodeId)> row;
  std::function<runtime::Setting(NodeId)> setting;
  std::function<runtime::OperatorSum(const Operator&)> sum;
};

/// Everything of the plan except `chip`, the slots and what is left out.
runtime::Plan lower_experiment(const Instance& instance, const SourceSet& sources, const ExperimentRows& rows);

/// What the plan's equation leaves out of its chip.
std::vector<std::string> left_out(const runtime::Plan& plan);

}  // namespace tarn::compiler
