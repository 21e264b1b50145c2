#include "compiler/codegen/lanes.h"

#include <map>

namespace tarn::compiler {

using llvm::Value;

namespace {

constexpr std::size_t kMostStraight = 1600;  ///< Multiplications of straight-line code.
constexpr std::size_t kMostKept = 8;         ///< Amplitudes: 16 vectors of the 32 registers.

LinearForm negated(LinearForm form) {
  for (auto& entry : form) entry.second = -entry.second;
  return form;
}

/// A form up to its sign, which is chosen so that the first factor is positive.
struct Signed {
  LinearForm form;
  bool minus = false;
};

Signed with_sign(const LinearForm& form) {
  if (form.empty() || form[0].second > 0) return {form, false};
  return {negated(form), true};
}

/// Every distinct form of the elements, numbered.
class Forms {
 public:
  explicit Forms(const std::vector<std::vector<Element>>& rows) {
    for (const auto& row : rows)
      for (const Element& element : row)
        for (const LinearForm* form : {&element.real, &element.imaginary})
          if (!form->empty() && numbers_.try_emplace(with_sign(*form).form, list_.size()).second)
            list_.push_back(with_sign(*form).form);
  }
  const std::vector<LinearForm>& list() const { return list_; }
  std::size_t number(const LinearForm& form) const { return numbers_.at(form); }

 private:
  std::map<LinearForm, std::size_t> numbers_;
  std::vector<LinearForm> list_;
};

class LaneEmitter {
 public:
  LaneEmitter(Unit& unit, const SweepPlan& plan) : unit_(unit), build_(unit.build), rows_(rows_of(plan)), forms_(rows_) {}

  llvm::Function* run(const std::string& name) {
    auto* p = unit_.pointer();
    auto* function = add_function(unit_, name, {p, p, p, p}, true);
    coefficients_ = function->getArg(0);
    x_ = function->getArg(2);
    y_ = function->getArg(3);
    y_is_apart(function);
    if (multiplications() <= kMostStraight) {
      emit_straight();
    } else {
      emit_table();
    }
    build_.CreateRet(build_.getInt32(0));
    return function;
  }

 private:
  struct Pair {
    Value *real, *imaginary;
  };

  static std::vector<std::vector<Element>> rows_of(const SweepPlan& plan) {
    std::vector<std::vector<Element>> rows;
    for (std::uint64_t j = 0; j >> plan.bits == 0; ++j) rows.push_back(row_elements(plan, j));
    return rows;
  }

  static void y_is_apart(llvm::Function* function) { function->getArg(3)->addAttr(llvm::Attribute::NoAlias); }

  std::size_t multiplications() const {
    std::size_t count = 0;
    for (const auto& row : rows_)
      for (const Element& element : row) count += (element.real.empty() ? 0u : 2u) + (element.imaginary.empty() ? 0u : 2u);
    return count;
  }

  llvm::Type* vector() const { return unit_.vector(unit_.lanes); }
  unsigned alignment() const { return unit_.lanes * 8; }
  Value* offset(std::uint64_t doubles) const { return build_.getInt64(doubles * unit_.lanes); }

  /// The value of a form in each lane.
  Value* form_value(const LinearForm& form) {
    Value* sum = nullptr;
    for (const auto& [row, factor] : form) {
      Value* coefficient = load(unit_, vector(), coefficients_, offset(row), 8);
      sum = add(sum, coefficient, splat(unit_, factor, unit_.lanes), false);
    }
    return sum;
  }

  /// sum +- a b, where no sum yet is zero.
  Value* add(Value* sum, Value* a, Value* b, bool minus) {
    if (minus) a = build_.CreateFNeg(a);
    return sum ? multiply_add(unit_, a, b, sum) : build_.CreateFMul(a, b);
  }

  Pair load_amplitude(Value* base, Value* first) {
    Value* second = build_.CreateAdd(first, build_.getInt64(unit_.lanes));
    return {load(unit_, vector(), base, first, alignment()), load(unit_, vector(), base, second, alignment())};
  }

  /// Amplitude k of x: kept in registers where all of x fits them, else read again for each use.
  Pair amplitude(std::uint64_t k) {
    if (rows_.size() > kMostKept) return load_amplitude(x_, offset(2 * k));
    if (!kept_.contains(k)) kept_.emplace(k, load_amplitude(x_, offset(2 * k)));
    return kept_.at(k);
  }

  void emit_straight() {
    std::vector<Value*> forms;
    for (const LinearForm& form : forms_.list()) forms.push_back(form_value(form));
    for (std::uint64_t j = 0; j < rows_.size(); ++j) {
      Pair sum{nullptr, nullptr};
      for (const Element& element : rows_[j]) {
        const Pair x = amplitude(j ^ element.mask);
        add_real(sum, element.real, x, forms);
        add_imaginary(sum, element.imaginary, x, forms);
      }
      store_amplitude(sum, offset(2 * j));
    }
  }

  void add_real(Pair& sum, const LinearForm& form, Pair x, const std::vector<Value*>& forms) {
    if (form.empty()) return;
    const Signed one = with_sign(form);
    Value* a = forms[forms_.number(one.form)];
    sum = {add(sum.real, x.real, a, one.minus), add(sum.imaginary, x.imaginary, a, one.minus)};
  }

  void add_imaginary(Pair& sum, const LinearForm& form, Pair x, const std::vector<Value*>& forms) {
    if (form.empty()) return;
    const Signed one = with_sign(form);
    Value* a = forms[forms_.number(one.form)];
    sum = {add(sum.real, x.imaginary, a, !one.minus), add(sum.imaginary, x.real, a, one.minus)};
  }

  void store_amplitude(Pair sum, Value* first) {
    Value* zero = splat(unit_, 0, unit_.lanes);
    store(unit_, sum.real ? sum.real : zero, y_, first, alignment());
    store(unit_, sum.imaginary ? sum.imaginary : zero, y_, build_.CreateAdd(first, build_.getInt64(unit_.lanes)), alignment());
  }

  /// The elements as numbers: for each the place of its amplitude and of its two forms.
  struct Arrays {
    std::vector<std::uint64_t> row_ends{0}, amplitudes, reals, imaginaries;
    std::vector<std::uint64_t> form_ends{0}, form_rows;
    std::vector<double> form_factors;
  };

  /// Form 0 is zero; form 2k + 1 is number k, form 2k + 2 minus that.
  std::uint64_t form_index(const LinearForm& form) const {
    if (form.empty()) return 0;
    const Signed one = with_sign(form);
    return 2 * forms_.number(one.form) + (one.minus ? 2 : 1);
  }

  Arrays arrays() const {
    Arrays made;
    made.form_ends.push_back(0);
    for (const LinearForm& one : forms_.list()) {
      for (const LinearForm& form : {one, negated(one)}) {
        for (const auto& [row, factor] : form) made.form_rows.push_back(row), made.form_factors.push_back(factor);
        made.form_ends.push_back(made.form_rows.size());
      }
    }
    for (std::uint64_t j = 0; j < rows_.size(); ++j) {
      for (const Element& element : rows_[j]) {
        made.amplitudes.push_back(2 * (j ^ element.mask) * unit_.lanes);
        made.reals.push_back(form_index(element.real) * unit_.lanes);
        made.imaginaries.push_back(form_index(element.imaginary) * unit_.lanes);
      }
      made.row_ends.push_back(made.amplitudes.size());
    }
    return made;
  }

  template <class Number>
  Value* data(const std::string& name, const std::vector<Number>& numbers) {
    return constant_data(unit_, name, llvm::ConstantDataArray::get(build_.getContext(), numbers));
  }

  Value* entry(Value* array, Value* k) { return build_.CreateLoad(unit_.index(), build_.CreateGEP(unit_.index(), array, k)); }

  void emit_table() {
    const Arrays made = arrays();
    const std::uint64_t forms = made.form_ends.size() - 1;
    auto* store_type = llvm::ArrayType::get(vector(), forms);
    Value* values = build_.CreateAlloca(store_type);
    emit_form_values(made, values, forms);
    Value *ends = data("row_ends", made.row_ends), *amplitudes = data("amplitudes", made.amplitudes);
    Value *reals = data("reals", made.reals), *imaginaries = data("imaginaries", made.imaginaries);
    loop(unit_, build_.getInt64(0), build_.getInt64(rows_.size()), build_.getInt64(1), [&](Value* j) {
      Value *first = entry(ends, j), *end = entry(ends, build_.CreateAdd(j, build_.getInt64(1)));
      const Pair sum = accumulate(first, end, [&](Value* k, Pair before) {
        const Pair x = load_amplitude(x_, entry(amplitudes, k));
        Value* a = load(unit_, vector(), values, entry(reals, k), alignment());
        Value* b = load(unit_, vector(), values, entry(imaginaries, k), alignment());
        return Pair{add(add(before.real, a, x.real, false), b, x.imaginary, true),
                    add(add(before.imaginary, a, x.imaginary, false), b, x.real, false)};
      });
      store_amplitude(sum, build_.CreateMul(j, offset(2)));
    });
  }

  void emit_form_values(const Arrays& made, Value* values, std::uint64_t forms) {
    Value *ends = data("form_ends", made.form_ends), *rows = data("form_rows", made.form_rows);
    Value* factors = data("form_factors", made.form_factors);
    loop(unit_, build_.getInt64(0), build_.getInt64(forms), build_.getInt64(1), [&](Value* f) {
      Value *first = entry(ends, f), *end = entry(ends, build_.CreateAdd(f, build_.getInt64(1)));
      const Pair sum = accumulate(first, end, [&](Value* k, Pair before) {
        Value* coefficient = load(unit_, vector(), coefficients_, build_.CreateMul(entry(rows, k), offset(1)), 8);
        Value* factor = build_.CreateVectorSplat(unit_.lanes, load(unit_, unit_.real(), factors, k, 8));
        return Pair{add(before.real, coefficient, factor, false), before.imaginary};
      });
      store(unit_, sum.real, values, build_.CreateMul(f, offset(1)), alignment());
    });
  }

  /// The sum that `step` builds from zero over k in [first, end), which may be empty.
  Pair accumulate(Value* first, Value* end, const std::function<Pair(Value*, Pair)>& step) {
    auto* function = build_.GetInsertBlock()->getParent();
    auto* before = build_.GetInsertBlock();
    auto* block = llvm::BasicBlock::Create(build_.getContext(), "terms", function);
    auto* after = llvm::BasicBlock::Create(build_.getContext(), "sum", function);
    Value* zero = splat(unit_, 0, unit_.lanes);
    build_.CreateCondBr(build_.CreateICmpULT(first, end), block, after);
    build_.SetInsertPoint(block);
    auto* k = build_.CreatePHI(unit_.index(), 2);
    llvm::PHINode* now[2] = {build_.CreatePHI(vector(), 2), build_.CreatePHI(vector(), 2)};
    const Pair next = step(k, {now[0], now[1]});
    Value* following = build_.CreateAdd(k, build_.getInt64(1));
    k->addIncoming(first, before), k->addIncoming(following, block);
    now[0]->addIncoming(zero, before), now[0]->addIncoming(next.real, block);
    now[1]->addIncoming(zero, before), now[1]->addIncoming(next.imaginary, block);
    build_.CreateCondBr(build_.CreateICmpULT(following, end), block, after);
    build_.SetInsertPoint(after);
    llvm::PHINode* sum[2] = {build_.CreatePHI(vector(), 2), build_.CreatePHI(vector(), 2)};
    sum[0]->addIncoming(zero, before), sum[0]->addIncoming(next.real, block);
    sum[1]->addIncoming(zero, before), sum[1]->addIncoming(next.imaginary, block);
    return {sum[0], sum[1]};
  }

  Unit& unit_;
  llvm::IRBuilder<>& build_;
  std::vector<std::vector<Element>> rows_;
  Forms forms_;
  std::map<std::uint64_t, Pair> kept_;
  Value *coefficients_ = nullptr, *x_ = nullptr, *y_ = nullptr;
};

}  // namespace

llvm::Function* emit_lane_apply(Unit& unit, const SweepPlan& plan, const std::string& name) {
  return LaneEmitter(unit, plan).run(name);
}

}  // namespace tarn::compiler
