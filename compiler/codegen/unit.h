#pragma once
/// \file What the emitters share: one LLVM module in the making and its vector width.
/// Included by the LLVM translation units of this folder only; IRBuilder and nothing heavier.

#include <llvm/IR/IRBuilder.h>
#include <llvm/IR/Module.h>

#include <cstdint>
#include <functional>
#include <string>
#include <vector>

namespace tarn::compiler {

/// Emission state. Functions are made with the processor's attributes by add_function().
struct Unit {
  llvm::Module& module;
  llvm::IRBuilder<>& build;
  unsigned lanes;        ///< W, the width of scalar functions and lane vectors: 2, 4 or 8.
  std::string cpu, features;
  std::function<bool(const std::string&)> has_vector_function;  ///< Is this symbol in libmvec?

  llvm::Type* real() const { return build.getDoubleTy(); }
  llvm::Type* index() const { return build.getInt64Ty(); }
  llvm::Type* pointer() const { return build.getPtrTy(); }
  llvm::FixedVectorType* vector(unsigned width) const { return llvm::FixedVectorType::get(real(), width); }
};

/// A function that returns a status, with the builder at its entry. Visible entries are exported.
llvm::Function* add_function(Unit& unit, const std::string& name, std::vector<llvm::Type*> arguments, bool exported);

/// for (i = first; i < end; i += step) body(i), with first < end known. The builder ends behind the loop.
void loop(Unit& unit, llvm::Value* first, llvm::Value* end, llvm::Value* step,
          const std::function<void(llvm::Value*)>& body);

llvm::Value* load(Unit& unit, llvm::Type* type, llvm::Value* base, llvm::Value* offset, unsigned alignment);
void store(Unit& unit, llvm::Value* value, llvm::Value* base, llvm::Value* offset, unsigned alignment);
/// a * b + c in one rounding where the processor can.
llvm::Value* multiply_add(Unit& unit, llvm::Value* a, llvm::Value* b, llvm::Value* c);
llvm::Value* splat(Unit& unit, double number, unsigned width);
/// A constant array in the object.
llvm::Value* constant_data(Unit& unit, const std::string& name, llvm::Constant* data);

}  // namespace tarn::compiler
