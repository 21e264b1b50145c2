#pragma once
/// \file What all points of one plan share: plan, kernel, tables, prepared data. Read-only.

#include <span>
#include <vector>

#include "runtime/experiment/functions.h"
#include "runtime/experiment/outcome.h"
#include "runtime/integrate/vectors.h"

namespace tarn::runtime {

struct Entries;  // runtime/equation/propagate_linear.h

/// How many points of the plan the kernel integrates together; 1 without lanes.
std::size_t lanes_used(const Plan& plan, const Kernel& kernel);

class PlanModel {
 public:
  /// Keeps references to all three. Precondition: the kernel has the sets and generators that the
  /// plan's equation needs.
  PlanModel(const Plan& plan, const Kernel& kernel, std::span<const TableNumbers> tables);

  const Plan& plan() const { return plan_; }
  const Kernel& kernel() const { return kernel_; }
  std::span<const TableNumbers> tables() const { return tables_; }

  /// Functions with the inputs of a grid point.
  Functions functions_at(std::uint64_t index) const;

  /// The entries of the generator that the plan's equation integrates, with lanes if compiled.
  Entries entries() const;
  /// Points that go together: the lanes of the entries.
  std::size_t lanes() const { return lanes_; }
  /// Some coefficient depends on t itself.
  bool reads_t() const { return reads_t_; }

 private:
  const Plan& plan_;
  const Kernel& kernel_;
  std::span<const TableNumbers> tables_;
  std::uint32_t generator_;
  AlignedArray prepared_;
  std::size_t lanes_ = 1;
  bool reads_t_ = false;
};

}  // namespace tarn::runtime
