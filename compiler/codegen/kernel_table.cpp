#include "compiler/codegen/kernel_table.h"

#include <limits>
#include <map>

#include "compiler/codegen/combine.h"
#include "compiler/codegen/diagonal.h"
#include "compiler/codegen/lanes.h"
#include "compiler/codegen/scalar.h"
#include "compiler/codegen/sweep.h"
#include "lang/support/check.h"
#include "runtime/abi/kernel.h"

namespace tarn::compiler {

using llvm::Constant;

namespace {

class KernelEmitter {
 public:
  KernelEmitter(Unit& unit, const ir::Module& module) : unit_(unit), module_(module) {}

  void run() {
    for (std::uint32_t k = 0; k < module_.sets.size(); ++k) function_set(k);
    for (std::uint32_t k = 0; k < module_.generators.size(); ++k) generator(k);
    table();
  }

 private:
  void add(std::uint32_t kind, std::uint32_t index, llvm::Function* code) {
    entries_.push_back(record({number(kind), number(index), code}));
  }

  Constant* number(std::uint32_t value) const { return unit_.build.getInt32(value); }

  static Constant* record(std::vector<Constant*> fields) { return llvm::ConstantStruct::getAnon(fields); }

  Constant* text(const std::string& characters) {
    return unit_.build.CreateGlobalString(characters, "name", 0, &unit_.module);
  }

  Constant* array(const std::vector<Constant*>& rows, const std::string& name) {
    if (rows.empty()) return llvm::ConstantPointerNull::get(unit_.build.getPtrTy());
    auto* data = llvm::ConstantArray::get(llvm::ArrayType::get(rows[0]->getType(), rows.size()), rows);
    return new llvm::GlobalVariable(unit_.module, data->getType(), true, llvm::GlobalValue::PrivateLinkage, data, name);
  }

  void function_set(std::uint32_t index) {
    const ir::FunctionSet& set = module_.sets[index];
    const std::string number_text = std::to_string(index);
    sets_.push_back(record({text(set.name), number(static_cast<std::uint32_t>(set.functions.size())), number(0)}));
    add(TARN_VALUES, index, emit_set(unit_, module_, set, Wanted::values, "tarn_values_" + number_text));
    if (set.derivatives.empty()) return;
    add(TARN_DERIVATIVES, index, emit_set(unit_, module_, set, Wanted::derivatives, "tarn_derivatives_" + number_text));
  }

  void generator(std::uint32_t index) {
    const ir::Generator& generator = module_.generators[index];
    const SweepPlan plan = plan_sweep(generator);
    TARN_CHECK(plan.prepared_doubles() <= std::numeric_limits<std::uint32_t>::max());
    const auto prepared = static_cast<std::uint32_t>(plan.prepared_doubles());
    generators_.push_back(record({text(generator.name), number(generator.bits), number(prepared)}));
    const std::string tail = "_" + std::to_string(index);
    add(TARN_PREPARE, index, emit_prepare(unit_, plan, "tarn_prepare" + tail));
    llvm::Function* apply = emit_apply(unit_, plan, "tarn_apply" + tail);
    add(TARN_APPLY, index, apply);
    const std::uint64_t doubles = std::uint64_t{2} << generator.bits;
    llvm::Function* combine = combine_of(sweep_width(unit_, generator.bits), Weights::one_each);
    add(TARN_STAGE, index, emit_stage(unit_, combine, apply, doubles, "tarn_stage" + tail));
    if (generator.lanes) lane_entries(index, plan_elements(generator), doubles);
  }

  void lane_entries(std::uint32_t index, const SweepPlan& plan, std::uint64_t doubles) {
    const std::string tail = "_" + std::to_string(index);
    llvm::Function* apply = emit_lane_apply(unit_, plan, "tarn_lane_apply" + tail);
    add(TARN_LANE_APPLY, index, apply);
    llvm::Function* combine = combine_of(unit_.lanes, Weights::per_lane);
    add(TARN_LANE_STAGE, index, emit_stage(unit_, combine, apply, doubles * unit_.lanes, "tarn_lane_stage" + tail));
  }

  llvm::Function* combine_of(unsigned width, Weights weights) {
    llvm::Function*& made = combines_[{width, weights == Weights::per_lane}];
    if (!made) made = emit_combine(unit_, width, weights, weights == Weights::per_lane ? "combine_lanes" : "combine" + std::to_string(width));
    return made;
  }

  void table() {
    const auto count = [&](std::size_t rows) { return number(static_cast<std::uint32_t>(rows)); };
    Constant* fields = record({number(TARN_ABI_VERSION), number(unit_.lanes), count(module_.inputs.size()),
                               count(module_.tables.size()), count(sets_.size()), count(generators_.size()),
                               count(entries_.size()), number(0), array(sets_, "sets"),
                               array(generators_, "generators"), array(entries_, "entries")});
    new llvm::GlobalVariable(unit_.module, fields->getType(), true, llvm::GlobalValue::ExternalLinkage, fields, "tarn_kernel_table");
  }

  Unit& unit_;
  const ir::Module& module_;
  std::vector<Constant*> sets_, generators_, entries_;
  std::map<std::pair<unsigned, bool>, llvm::Function*> combines_;
};

}  // namespace

void emit_kernel(Unit& unit, const ir::Module& module) { KernelEmitter(unit, module).run(); }

}  // namespace tarn::compiler
