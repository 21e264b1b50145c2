#include "compiler/codegen/unit.h"

namespace tarn::compiler {

using llvm::Value;

llvm::Function* add_function(Unit& unit, const std::string& name, std::vector<llvm::Type*> arguments, bool exported) {
  auto* type = llvm::FunctionType::get(unit.build.getInt32Ty(), arguments, false);
  auto* function = llvm::Function::Create(type, exported ? llvm::Function::ExternalLinkage : llvm::Function::InternalLinkage, name, unit.module);
  const std::string width = std::to_string(64 * unit.lanes);
  function->addFnAttr("target-cpu", unit.cpu);
  function->addFnAttr("target-features", unit.features);
  function->addFnAttr("prefer-vector-width", width);
  function->addFnAttr("min-legal-vector-width", width);
  function->addFnAttr(llvm::Attribute::NoUnwind);
  unit.build.SetInsertPoint(llvm::BasicBlock::Create(unit.module.getContext(), "entry", function));
  return function;
}

void loop(Unit& unit, Value* first, Value* end, Value* step, const std::function<void(Value*)>& body) {
  auto& build = unit.build;
  auto* function = build.GetInsertBlock()->getParent();
  auto* before = build.GetInsertBlock();
  auto* block = llvm::BasicBlock::Create(build.getContext(), "loop", function);
  auto* after = llvm::BasicBlock::Create(build.getContext(), "after", function);
  build.CreateBr(block);
  build.SetInsertPoint(block);
  auto* i = build.CreatePHI(unit.index(), 2);
  i->addIncoming(first, before);
  body(i);
  auto* next = build.CreateAdd(i, step, "", true, true);
  i->addIncoming(next, build.GetInsertBlock());
  build.CreateCondBr(build.CreateICmpULT(next, end), block, after);
  build.SetInsertPoint(after);
}

Value* load(Unit& unit, llvm::Type* type, Value* base, Value* offset, unsigned alignment) {
  auto* place = unit.build.CreateGEP(unit.real(), base, offset);
  return unit.build.CreateAlignedLoad(type, place, llvm::Align(alignment));
}

void store(Unit& unit, Value* value, Value* base, Value* offset, unsigned alignment) {
  auto* place = unit.build.CreateGEP(unit.real(), base, offset);
  unit.build.CreateAlignedStore(value, place, llvm::Align(alignment));
}

Value* multiply_add(Unit& unit, Value* a, Value* b, Value* c) {
  return unit.build.CreateIntrinsic(llvm::Intrinsic::fmuladd, {a->getType()}, {a, b, c});
}

Value* splat(Unit& unit, double number, unsigned width) {
  return llvm::ConstantVector::getSplat(llvm::ElementCount::getFixed(width), llvm::ConstantFP::get(unit.real(), number));
}

Value* constant_data(Unit& unit, const std::string& name, llvm::Constant* data) {
  auto* global = new llvm::GlobalVariable(unit.module, data->getType(), true, llvm::GlobalValue::PrivateLinkage, data, name);
  global->setAlignment(llvm::Align(64));
  return global;
}

}  // namespace tarn::compiler
