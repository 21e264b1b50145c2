#include "compiler/codegen/scalar.h"

#include <limits>
#include <map>
#include <optional>

#include "lang/support/check.h"

namespace tarn::compiler {

using ir::Argument;
using ir::BinaryOp;
using ir::UnaryOp;
using ir::ValueId;
using llvm::Value;

namespace {

/// The prefix of libmvec's names for this width, by the vector calling convention of x86-64.
std::string vector_name(unsigned lanes, const std::string& function, std::size_t operands) {
  const std::string head = lanes == 8 ? "_ZGVeN8" : lanes == 4 ? "_ZGVdN4" : "_ZGVbN2";
  return head + std::string(operands, 'v') + "_" + function;
}

class SetEmitter {
 public:
  SetEmitter(Unit& unit, const ir::Module& module, const ir::FunctionSet& set, Wanted wanted)
      : unit_(unit), build_(unit.build), module_(module), values_(module.values.size()), varies_(module.values.size()) {
    for (const auto& function : set.functions) outputs_.push_back(function.value);
    if (wanted == Wanted::derivatives) outputs_ = set.derivatives;
    find_needed();
  }

  llvm::Function* run(const std::string& name) {
    auto* p = unit_.pointer();
    auto* function = add_function(unit_, name, {p, unit_.index(), p, p, p, p}, true);
    block_ = function->getArg(0);
    count_ = function->getArg(1);
    for (unsigned k = 0; k < 3; ++k) arguments_[k] = function->getArg(2 + k);
    out_ = function->getArg(5);
    inputs_ = build_.CreateLoad(p, block_);
    tables_ = build_.CreateLoad(p, build_.CreateConstGEP1_64(p, block_, 1));
    emit_values(false);
    emit_groups(function);
    return function;
  }

 private:
  using Vector = Value*;

  void find_needed() {
    needed_.assign(module_.values.size(), false);
    for (const ValueId output : outputs_) needed_[output.row] = true;
    for (std::size_t row = module_.values.size(); row-- > 0;)
      if (needed_[row]) ir::for_each_operand(module_.values[row].op, [&](const ValueId& id) { needed_[id.row] = true; });
    for (std::size_t row = 0; row < module_.values.size(); ++row) {
      bool varies = false;
      if (const auto* read = std::get_if<ir::ReadArgument>(&module_.values[row].op)) {
        varies = true;
        reads_[static_cast<std::size_t>(read->argument)] |= needed_[row];
      }
      ir::for_each_operand(module_.values[row].op, [&](const ValueId& id) { varies = varies || varies_[id.row]; });
      varies_[row] = varies;
    }
  }

  void emit_values(bool varying) {
    for (std::size_t row = 0; row < module_.values.size(); ++row)
      if (needed_[row] && varies_[row] == varying)
        values_[row] = std::visit([&](const auto& op) { return emit(op, module_.values[row].type); }, module_.values[row].op);
  }

  void emit_groups(llvm::Function* function) {
    auto& context = build_.getContext();
    auto* before = build_.GetInsertBlock();
    auto* group = llvm::BasicBlock::Create(context, "group", function);
    auto* done = llvm::BasicBlock::Create(context, "done", function);
    auto* none = build_.getInt1(false);
    build_.CreateCondBr(build_.CreateICmpEQ(count_, build_.getInt64(0)), done, group);
    build_.SetInsertPoint(group);
    auto* first = build_.CreatePHI(unit_.index(), 2);
    auto* bad = build_.CreatePHI(build_.getInt1Ty(), 2);
    first->addIncoming(build_.getInt64(0), before);
    bad->addIncoming(none, before);
    Value* bad_now = build_.CreateOr(bad, emit_group(first));
    Value* next = build_.CreateAdd(first, build_.getInt64(unit_.lanes));
    auto* last = build_.GetInsertBlock();
    first->addIncoming(next, last);
    bad->addIncoming(bad_now, last);
    build_.CreateCondBr(build_.CreateICmpULT(next, count_), group, done);
    build_.SetInsertPoint(done);
    auto* result = build_.CreatePHI(build_.getInt1Ty(), 2);
    result->addIncoming(none, before);
    result->addIncoming(bad_now, last);
    build_.CreateRet(build_.CreateZExt(result, build_.getInt32Ty()));  // TARN_OK 0, TARN_NOT_FINITE 1
  }

  /// One group of W points; the lanes beyond the last point repeat the group's first one.
  Value* emit_group(Value* first) {
    std::vector<llvm::Constant*> numbers;
    for (unsigned lane = 0; lane < unit_.lanes; ++lane) numbers.push_back(build_.getInt64(lane));
    Value* left = build_.CreateVectorSplat(unit_.lanes, build_.CreateSub(count_, first));
    Value* mask = build_.CreateICmpULT(llvm::ConstantVector::get(numbers), left);
    for (std::size_t k = 0; k < 3; ++k) {
      if (!reads_[k]) continue;
      Value* place = build_.CreateGEP(unit_.real(), arguments_[k], first);
      Value* padding = build_.CreateVectorSplat(unit_.lanes, build_.CreateLoad(unit_.real(), place));
      points_[k] = build_.CreateMaskedLoad(real(), place, llvm::Align(8), mask, padding);
    }
    emit_values(true);
    return build_.CreateOrReduce(build_.CreateAnd(store_outputs(first, mask), mask));
  }

  Value* store_outputs(Value* first, Value* mask) {
    Value* infinity = splat(unit_, std::numeric_limits<double>::infinity(), unit_.lanes);
    Value* bad = llvm::Constant::getNullValue(mask->getType());
    Value* place = build_.CreateGEP(unit_.real(), out_, first);
    for (const ValueId output : outputs_) {
      Value* value = values_[output.row];
      if (module_.values[output.row].type == ir::Type::truth) value = build_.CreateUIToFP(value, real());
      build_.CreateMaskedStore(value, place, llvm::Align(8), mask);
      bad = build_.CreateOr(bad, build_.CreateFCmpUGE(call(llvm::Intrinsic::fabs, value), infinity));
      place = build_.CreateGEP(unit_.real(), place, count_);
    }
    return bad;
  }

  llvm::Type* real() const { return unit_.vector(unit_.lanes); }
  Vector number(double value) const { return splat(unit_, value, unit_.lanes); }
  Vector at(ValueId id) const { return values_[id.row]; }
  Vector call(llvm::Intrinsic::ID id, Vector x) { return build_.CreateUnaryIntrinsic(id, x); }

  /// A function of libm on each lane.
  Vector call(const std::string& function, std::vector<Value*> operands) {
    const std::string name = vector_name(unit_.lanes, function, operands.size());
    if (unit_.has_vector_function(name)) return build_.CreateCall(declare(name, real(), operands.size()), operands);
    auto scalar = declare(function, unit_.real(), operands.size());
    Value* result = llvm::PoisonValue::get(real());
    for (unsigned lane = 0; lane < unit_.lanes; ++lane) {
      std::vector<Value*> one;
      for (Value* operand : operands) one.push_back(build_.CreateExtractElement(operand, lane));
      result = build_.CreateInsertElement(result, build_.CreateCall(scalar, one), lane);
    }
    return result;
  }

  llvm::FunctionCallee declare(const std::string& name, llvm::Type* type, std::size_t operands) {
    const std::vector<llvm::Type*> arguments(operands, type);
    auto callee = unit_.module.getOrInsertFunction(name, llvm::FunctionType::get(type, arguments, false));
    auto* function = llvm::cast<llvm::Function>(callee.getCallee());
    function->setDoesNotThrow();
    function->setDoesNotAccessMemory();
    function->setWillReturn();
    return callee;
  }

  Vector emit(const ir::Constant& op, ir::Type type) {
    if (type == ir::Type::real) return number(op.value);
    return build_.CreateVectorSplat(unit_.lanes, build_.getInt1(op.value != 0));
  }

  Vector emit(const ir::Input& op, ir::Type) {
    return load(unit_, real(), inputs_, build_.getInt64(std::uint64_t{op.slot} * unit_.lanes), 8);
  }

  Vector emit(const ir::ReadArgument& op, ir::Type) { return points_[static_cast<std::size_t>(op.argument)]; }

  Vector emit(const ir::Select& op, ir::Type) {
    return build_.CreateSelect(at(op.condition), at(op.then_value), at(op.else_value));
  }

  Vector emit(const ir::Unary& op, ir::Type) {
    Vector x = at(op.operand);
    switch (op.op) {
      case UnaryOp::neg: return build_.CreateFNeg(x);
      case UnaryOp::exp: return call("exp", {x});
      case UnaryOp::ln: return call("log", {x});
      case UnaryOp::log10: return call("log10", {x});
      case UnaryOp::sqrt: return call(llvm::Intrinsic::sqrt, x);
      case UnaryOp::sin: return call("sin", {x});
      case UnaryOp::cos: return call("cos", {x});
      case UnaryOp::tan: return call("tan", {x});
      case UnaryOp::asin: return call("asin", {x});
      case UnaryOp::acos: return call("acos", {x});
      case UnaryOp::atan: return call("atan", {x});
      case UnaryOp::sinh: return call("sinh", {x});
      case UnaryOp::cosh: return call("cosh", {x});
      case UnaryOp::tanh: return call("tanh", {x});
      case UnaryOp::abs: return call(llvm::Intrinsic::fabs, x);
      case UnaryOp::floor: return call(llvm::Intrinsic::floor, x);
      case UnaryOp::logical_not: return build_.CreateNot(x);
    }
    return nullptr;
  }

  Vector emit(const ir::Binary& op, ir::Type) {
    Vector x = at(op.lhs), y = at(op.rhs);
    switch (op.op) {
      case BinaryOp::add: return build_.CreateFAdd(x, y);
      case BinaryOp::sub: return build_.CreateFSub(x, y);
      case BinaryOp::mul: return build_.CreateFMul(x, y);
      case BinaryOp::div: return build_.CreateFDiv(x, y);
      case BinaryOp::pow: return call("pow", {x, y});
      case BinaryOp::mod:
        return build_.CreateFSub(x, build_.CreateFMul(y, call(llvm::Intrinsic::floor, build_.CreateFDiv(x, y))));
      case BinaryOp::min: return choose(build_.CreateFCmpOLT(x, y), x, y);
      case BinaryOp::max: return choose(build_.CreateFCmpOGT(x, y), x, y);
      case BinaryOp::less: return build_.CreateFCmpOLT(x, y);
      case BinaryOp::less_equal: return build_.CreateFCmpOLE(x, y);
      case BinaryOp::equal: return build_.CreateFCmpOEQ(x, y);
      case BinaryOp::not_equal: return build_.CreateFCmpUNE(x, y);
      case BinaryOp::logical_and: return build_.CreateAnd(x, y);
      case BinaryOp::logical_or: return build_.CreateOr(x, y);
    }
    return nullptr;
  }

  /// x if it is chosen or no number, so that a NaN is never hidden.
  Vector choose(Value* chosen, Vector x, Vector y) {
    return build_.CreateSelect(build_.CreateOr(chosen, build_.CreateFCmpUNO(x, x)), x, y);
  }

  /// Where x falls in a table: the piece, and x held within the knots minus the piece's knot.
  struct Search {
    Value *columns, *piece, *distance, *outside;
  };

  Vector gather(Value* base, Value* index) {
    return build_.CreateMaskedGather(real(), build_.CreateGEP(unit_.real(), base, index), llvm::Align(8));
  }

  Value* indices(std::uint64_t value) { return build_.CreateVectorSplat(unit_.lanes, build_.getInt64(value)); }

  /// Halves the range a fixed number of times: piece is the number of inner knots that are <= x.
  Value* halve_range(Value* knots, Vector x, std::uint64_t pieces) {
    Value* piece = indices(0);
    std::uint64_t step = 1;
    while (2 * step < pieces) step *= 2;
    for (; step > 0; step /= 2) {
      Value* tried = lesser(build_.CreateAdd(piece, indices(step)), indices(pieces - 1));
      piece = build_.CreateSelect(build_.CreateFCmpOLE(gather(knots, tried), x), tried, piece);
    }
    return piece;
  }

  Value* lesser(Value* a, Value* b) { return build_.CreateSelect(build_.CreateICmpULT(a, b), a, b); }

  /// Where x would fall if the knots were even. Precondition: low <= x <= high or x no number.
  Value* guess_piece(Vector x, Vector low, Vector high, std::uint64_t pieces) {
    Value* scale = build_.CreateFDiv(number(static_cast<double>(pieces)), build_.CreateFSub(high, low));
    Value* place = build_.CreateFMul(build_.CreateFSub(x, low), scale);
    place = build_.CreateSelect(build_.CreateFCmpORD(x, x), place, number(0));
    Value* whole = build_.CreateFPToSI(place, llvm::FixedVectorType::get(build_.getInt32Ty(), unit_.lanes));
    return lesser(build_.CreateZExt(whole, indices(0)->getType()), indices(pieces - 1));
  }

  /// The guess if it is right in every lane, as it mostly is on even knots; else the range is halved.
  /// Both give the same piece, so a lane's result does not depend on its neighbours.
  Value* find_piece(Value* knots, Vector x, Vector low, Vector high, std::uint64_t pieces) {
    if (pieces == 1) return indices(0);
    Value* guess = guess_piece(x, low, high, pieces);
    Value* next = build_.CreateAdd(guess, indices(1));
    Value* in_last = build_.CreateICmpEQ(guess, indices(pieces - 1));
    Value* below_next = build_.CreateOr(build_.CreateFCmpOLT(x, gather(knots, next)), in_last);
    Value* right = build_.CreateAnd(build_.CreateFCmpOLE(gather(knots, guess), x), below_next);
    auto* function = build_.GetInsertBlock()->getParent();
    auto* guessed = build_.GetInsertBlock();
    auto* halve = llvm::BasicBlock::Create(build_.getContext(), "halve", function);
    auto* found = llvm::BasicBlock::Create(build_.getContext(), "found", function);
    build_.CreateCondBr(build_.CreateAndReduce(right), found, halve);
    build_.SetInsertPoint(halve);
    Value* halved = halve_range(knots, x, pieces);
    build_.CreateBr(found);
    build_.SetInsertPoint(found);
    auto* piece = build_.CreatePHI(guess->getType(), 2);
    piece->addIncoming(guess, guessed);
    piece->addIncoming(halved, halve);
    return piece;
  }

  const Search& search(const ir::TableRead& op) {
    const auto [place, is_new] = searches_.try_emplace({op.table.row, op.x.row});
    if (!is_new) return place->second;
    const std::uint64_t pieces = module_.tables[op.table.row].pieces();
    Value* knots = build_.CreateLoad(unit_.pointer(), build_.CreateConstGEP1_64(unit_.pointer(), tables_, op.table.row));
    const auto end = [&](std::uint64_t j) {
      return build_.CreateVectorSplat(unit_.lanes, load(unit_, unit_.real(), knots, build_.getInt64(j), 8));
    };
    Value *low = end(0), *high = end(pieces), *x = at(op.x);
    Value* below = build_.CreateFCmpOLT(x, low);
    Value* above = build_.CreateFCmpOGT(x, high);
    Value* held = build_.CreateSelect(below, low, build_.CreateSelect(above, high, x));
    Value* piece = find_piece(knots, held, low, high, pieces);
    Value* distance = build_.CreateFSub(held, gather(knots, piece));
    Value* columns = build_.CreateConstGEP1_64(unit_.real(), knots, pieces + 1);
    return place->second = {columns, piece, distance, build_.CreateOr(below, above)};
  }

  Vector emit(const ir::TableRead& op, ir::Type) {
    const Search where = search(op);
    const std::uint64_t pieces = module_.tables[op.table.row].pieces();
    static constexpr double kFactors[4][4] = {{1, 1, 1, 1}, {0, 1, 2, 3}, {0, 0, 2, 6}, {0, 0, 0, 6}};
    Vector sum = nullptr;
    for (unsigned power = 4; power-- > op.order;) {
      Value* base = build_.CreateConstGEP1_64(unit_.real(), where.columns, power * pieces);
      Vector column = gather(base, where.piece);
      const double factor = kFactors[op.order][power];
      if (factor != 1) column = build_.CreateFMul(column, number(factor));
      sum = sum ? multiply_add(unit_, sum, where.distance, column) : column;
    }
    const bool vanishes = op.order > 0 || op.outside == ir::Outside::zero;
    return vanishes ? build_.CreateSelect(where.outside, number(0), sum) : sum;
  }

  Unit& unit_;
  llvm::IRBuilder<>& build_;
  const ir::Module& module_;
  std::vector<ValueId> outputs_;
  std::vector<bool> needed_;
  std::vector<Value*> values_;
  std::vector<bool> varies_;
  bool reads_[3] = {false, false, false};
  Value *block_ = nullptr, *count_ = nullptr, *out_ = nullptr, *inputs_ = nullptr, *tables_ = nullptr;
  Value* arguments_[3] = {};
  Value* points_[3] = {};
  std::map<std::pair<std::uint32_t, std::uint32_t>, Search> searches_;
};

}  // namespace

llvm::Function* emit_set(Unit& unit, const ir::Module& module, const ir::FunctionSet& set, Wanted wanted, const std::string& name) {
  return SetEmitter(unit, module, set, wanted).run(name);
}

}  // namespace tarn::compiler
