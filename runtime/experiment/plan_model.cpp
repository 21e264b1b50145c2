#include "runtime/experiment/plan_model.h"

#include <array>

#include "lang/support/check.h"
#include "runtime/equation/propagate_linear.h"
#include "runtime/experiment/grid.h"

namespace tarn::runtime {
namespace {

/// True if some coefficient of the jumps changes with t at fixed s.
bool jumps_read_t(const Plan& plan, const Functions& functions) {
  constexpr std::array<double, 4> kTimes = {0.37, 1.9, 23.1, 1234.5};
  for (const double s : {0.11, 0.53, 0.89}) {
    const std::vector<double> first = functions.values(kCoefficients, s, 0);
    for (const double t : kTimes) {
      const std::vector<double> later = functions.values(kCoefficients, s, t);
      for (const Jump& jump : plan.chip.jumps) {
        for (const OperatorGroup& group : jump.op.groups) {
          if (later[group.coefficient] != first[group.coefficient]) return true;
        }
      }
    }
  }
  return false;
}

std::uint32_t generator_of(const Plan& plan) {
  return plan.choice.equation == Equation::lindblad ? kLiouvillian : kSchroedinger;
}

bool integrates(const Plan& plan) {
  return plan.choice.equation == Equation::schroedinger || plan.choice.equation == Equation::lindblad;
}

}  // namespace

std::size_t lanes_used(const Plan& plan, const Kernel& kernel) {
  const std::uint32_t generator = generator_of(plan);
  return integrates(plan) && kernel.lane_apply(generator) && kernel.lane_stage(generator) ? kernel.lanes() : 1;
}

PlanModel::PlanModel(const Plan& plan, const Kernel& kernel, std::span<const TableNumbers> tables)
    : plan_(plan), kernel_(kernel), tables_(tables),
      generator_(generator_of(plan)) {
  reads_t_ = !plan.chip.drive.groups.empty();
  if (!reads_t_ && plan.choice.equation != Equation::schroedinger && !plan.chip.jumps.empty()) {
    reads_t_ = jumps_read_t(plan, Functions(kernel, tables, plan));
  }
  if (!integrates(plan)) return;
  TARN_CHECK(kernel.generators() > generator_);
  prepared_ = AlignedArray(std::max<std::size_t>(1, kernel.prepared_doubles(generator_)));
  TARN_CHECK(kernel.prepare(generator_)(prepared_.data()) == TARN_OK);
  lanes_ = lanes_used(plan, kernel);
}

Functions PlanModel::functions_at(std::uint64_t index) const {
  Functions functions(kernel_, tables_, plan_);
  const std::vector<double> values = grid_values(plan_.axes, index);
  std::size_t next = 0;
  for (const Axis& axis : plan_.axes) {
    for (const AxisColumn& column : axis.columns) {
      if (column.slot) functions.set_input(*column.slot, values[next]);
      ++next;
    }
  }
  return functions;
}

Entries PlanModel::entries() const {
  Entries entries;
  const bool wide = lanes_ > 1;
  entries.values = kernel_.values(kCoefficients);
  entries.stage = wide ? kernel_.lane_stage(generator_) : kernel_.stage(generator_);
  entries.apply = wide ? kernel_.lane_apply(generator_) : kernel_.apply(generator_);
  entries.prepared = prepared_.data();
  entries.rows = kernel_.rows(kCoefficients);
  entries.bits = kernel_.bits(generator_);
  entries.lanes = static_cast<std::uint32_t>(lanes_);
  entries.reads_t = reads_t_;
  return entries;
}

}  // namespace tarn::runtime
