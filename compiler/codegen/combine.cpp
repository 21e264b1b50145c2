#include "compiler/codegen/combine.h"

namespace tarn::compiler {

using llvm::BasicBlock;
using llvm::Value;

namespace {

constexpr unsigned kMostAtOnce = 13;

class CombineEmitter {
 public:
  CombineEmitter(Unit& unit, unsigned width, Weights weights)
      : unit_(unit), build_(unit.build), width_(width), weights_(weights) {}

  llvm::Function* run(const std::string& name) {
    auto* p = unit_.pointer();
    auto* function = add_function(unit_, name, {unit_.index(), unit_.index(), p, p, p}, false);
    doubles_ = function->getArg(0);
    Value* count = function->getArg(1);
    weight_data_ = function->getArg(2);
    vectors_ = function->getArg(3);
    argument_ = function->getArg(4);
    function->getArg(4)->addAttr(llvm::Attribute::NoAlias);
    auto* many = BasicBlock::Create(build_.getContext(), "many", function);
    auto* choice = build_.CreateSwitch(count, many, kMostAtOnce);
    for (unsigned m = 1; m <= kMostAtOnce; ++m) {
      auto* block = BasicBlock::Create(build_.getContext(), "sum", function);
      choice->addCase(build_.getInt64(m), block);
      build_.SetInsertPoint(block);
      emit_sum(build_.getInt64(0), m, false);
      build_.CreateRet(build_.getInt32(0));
    }
    build_.SetInsertPoint(many);
    emit_many(count);
    build_.CreateRet(build_.getInt32(0));
    return function;
  }

 private:
  /// The first 13 at once, then one more at a time on top.
  void emit_many(Value* count) {
    emit_sum(build_.getInt64(0), kMostAtOnce, false);
    loop(unit_, build_.getInt64(kMostAtOnce), count, build_.getInt64(1), [&](Value* j) { emit_sum(j, 1, true); });
  }

  void emit_sum(Value* first, unsigned m, bool onto) {
    std::vector<Value*> weights, vectors;
    for (unsigned k = 0; k < m; ++k) {
      Value* j = build_.CreateAdd(first, build_.getInt64(k));
      weights.push_back(weight(j));
      vectors.push_back(build_.CreateLoad(unit_.pointer(), build_.CreateGEP(unit_.pointer(), vectors_, j)));
    }
    auto* type = unit_.vector(width_);
    loop(unit_, build_.getInt64(0), doubles_, build_.getInt64(width_), [&](Value* i) {
      Value* sum = onto ? load(unit_, type, argument_, i, width_ * 8) : nullptr;
      for (unsigned k = 0; k < m; ++k) {
        Value* x = load(unit_, type, vectors[k], i, width_ * 8);
        sum = sum ? multiply_add(unit_, weights[k], x, sum) : build_.CreateFMul(weights[k], x);
      }
      store(unit_, sum, argument_, i, width_ * 8);
    });
  }

  Value* weight(Value* j) {
    if (weights_ == Weights::one_each) return build_.CreateVectorSplat(width_, load(unit_, unit_.real(), weight_data_, j, 8));
    return load(unit_, unit_.vector(width_), weight_data_, build_.CreateMul(j, build_.getInt64(width_)), 8);
  }

  Unit& unit_;
  llvm::IRBuilder<>& build_;
  unsigned width_;
  Weights weights_;
  Value *doubles_ = nullptr, *weight_data_ = nullptr, *vectors_ = nullptr, *argument_ = nullptr;
};

}  // namespace

llvm::Function* emit_combine(Unit& unit, unsigned width, Weights weights, const std::string& name) {
  return CombineEmitter(unit, width, weights).run(name);
}

llvm::Function* emit_stage(Unit& unit, llvm::Function* combine, llvm::Function* apply, std::uint64_t doubles, const std::string& name) {
  auto& build = unit.build;
  auto* p = unit.pointer();
  auto* function = add_function(unit, name, {p, p, unit.index(), p, p, p, p}, true);
  const auto argument = [&](unsigned k) { return function->getArg(k); };
  auto* none = BasicBlock::Create(build.getContext(), "none", function);
  auto* some = BasicBlock::Create(build.getContext(), "some", function);
  build.CreateCondBr(build.CreateICmpEQ(argument(2), build.getInt64(0)), none, some);
  build.SetInsertPoint(none);
  build.CreateRet(build.getInt32(2));  // TARN_BAD_ARGUMENT
  build.SetInsertPoint(some);
  build.CreateCall(combine, {build.getInt64(doubles), argument(2), argument(3), argument(4), argument(5)});
  build.CreateRet(build.CreateCall(apply, {argument(0), argument(1), argument(5), argument(6)}));
  return function;
}

}  // namespace tarn::compiler
