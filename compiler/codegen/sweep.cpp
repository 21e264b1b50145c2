#include "compiler/codegen/sweep.h"

#include <algorithm>
#include <bit>
#include <map>

#include "lang/support/check.h"

namespace tarn::compiler {

using llvm::Value;

namespace {

constexpr std::uint64_t kMostVectorOps = 4096;  ///< Of one block's code; beyond it blocks shrink.

/// Flips that share one linear form.
using FlipsByForm = std::map<LinearForm, std::vector<std::uint64_t>>;

class ApplyEmitter {
 public:
  ApplyEmitter(Unit& unit, const SweepPlan& plan)
      : unit_(unit), build_(unit.build), plan_(plan), width_(sweep_width(unit, plan.bits)),
        lane_bits_(static_cast<std::uint32_t>(std::countr_zero(width_)) - 1), block_bits_(choose_block_bits()) {
    for (const Flip& flip : plan.flips) {
      if (!flip.real.empty()) real_forms_[flip.real].push_back(flip.mask);
      if (!flip.imaginary.empty()) imaginary_forms_[flip.imaginary].push_back(flip.mask);
    }
  }

  llvm::Function* run(const std::string& name) {
    auto* p = unit_.pointer();
    auto* function = add_function(unit_, name, {p, p, p, p}, true);
    coefficients_ = function->getArg(0);
    prepared_ = function->getArg(1);
    x_ = function->getArg(2);
    y_ = function->getArg(3);
    function->getArg(3)->addAttr(llvm::Attribute::NoAlias);
    load_coefficients();
    const std::uint64_t blocks = std::uint64_t{1} << (plan_.bits - lane_bits_ - block_bits_);
    if (blocks == 1) {
      emit_block(build_.getInt64(0));
    } else {
      loop(unit_, build_.getInt64(0), build_.getInt64(blocks), build_.getInt64(1), [&](Value* block) { emit_block(block); });
    }
    build_.CreateRet(build_.getInt32(0));
    return function;
  }

 private:
  /// The vectors of one block.
  using Block = std::vector<Value*>;

  std::uint32_t choose_block_bits() const {
    std::uint32_t bits = std::min(unit_.lanes == 8 ? 3u : 2u, plan_.bits - lane_bits_);
    while (bits > 0 && (plan_.flips.size() << bits) > kMostVectorOps) --bits;
    return bits;
  }

  std::uint64_t vectors() const { return std::uint64_t{1} << block_bits_; }

  Value* scalar_form(const LinearForm& form) {
    Value* sum = nullptr;
    for (const auto& [row, factor] : form) {
      Value* coefficient = load(unit_, unit_.real(), coefficients_, build_.getInt64(row), 8);
      Value* scaled = factor == 1 ? coefficient : build_.CreateFMul(coefficient, llvm::ConstantFP::get(unit_.real(), factor));
      sum = sum ? build_.CreateFAdd(sum, scaled) : scaled;
    }
    return sum;
  }

  void load_coefficients() {
    for (const auto* forms : {&real_forms_, &imaginary_forms_})
      for (const auto& entry : *forms)
        if (!scalars_.contains(entry.first)) scalars_[entry.first] = build_.CreateVectorSplat(width_, scalar_form(entry.first));
    for (const Flip& flip : plan_.flips)
      for (const auto* terms : {&flip.prepared_real, &flip.prepared_imaginary})
        for (const PreparedTerm& term : *terms)
          if (!halves_.contains(term.row))
            halves_[term.row] = build_.CreateVectorSplat(width_ / 2, load(unit_, unit_.real(), coefficients_, build_.getInt64(term.row), 8));
  }

  void emit_block(Value* block) {
    block_ = block;
    own_.assign(vectors(), nullptr);
    Block real = sum_part(real_forms_, false);
    Block imaginary = sum_part(imaginary_forms_, true);
    for (std::uint64_t v = 0; v < vectors(); ++v) store(unit_, combine(real[v], imaginary[v]), y_, place_in(block, v), alignment());
  }

  Block sum_part(const FlipsByForm& forms, bool imaginary) {
    Block sum(vectors(), nullptr);
    for (const Flip& flip : plan_.flips) {
      const auto& terms = imaginary ? flip.prepared_imaginary : flip.prepared_real;
      if (terms.empty()) continue;
      for (std::uint64_t v = 0; v < vectors(); ++v) add_product(sum[v], expanded(terms, v), flipped(flip.mask, v));
    }
    for (const auto& [form, masks] : forms) add_form(sum, scalars_.at(form), masks);
    return sum;
  }

  void add_form(Block& sum, Value* scalar, const std::vector<std::uint64_t>& masks) {
    Block plain(vectors(), nullptr);
    for (const std::uint64_t mask : masks)
      for (std::uint64_t v = 0; v < vectors(); ++v) {
        Value* x = flipped(mask, v);
        plain[v] = plain[v] ? build_.CreateFAdd(plain[v], x) : x;
      }
    for (std::uint64_t v = 0; v < vectors(); ++v) add_product(sum[v], scalar, plain[v]);
  }

  void add_product(Value*& sum, Value* a, Value* b) { sum = sum ? multiply_add(unit_, a, b, sum) : build_.CreateFMul(a, b); }

  /// real + i imaginary, on interleaved pairs.
  Value* combine(Value* real, Value* imaginary) {
    if (!imaginary) return real ? real : splat(unit_, 0, width_);
    std::vector<int> swapped;
    std::vector<llvm::Constant*> signs;
    for (unsigned k = 0; k < width_; ++k) {
      swapped.push_back(static_cast<int>(k ^ 1));
      signs.push_back(llvm::ConstantFP::get(unit_.real(), (k & 1) != 0 ? 1 : -1));
    }
    Value* turned = build_.CreateShuffleVector(imaginary, swapped);
    add_product(real, turned, llvm::ConstantVector::get(signs));
    return real;
  }

  unsigned alignment() const { return width_ * 8; }

  /// Offset [doubles] of vector v of a block.
  Value* place_in(Value* block, std::uint64_t v) {
    Value* first = build_.CreateShl(block, lane_bits_ + block_bits_ + 1);
    return build_.CreateAdd(first, build_.getInt64(v * width_));
  }

  /// Vector v of the block as it stands in x ^ mask.
  Value* flipped(std::uint64_t mask, std::uint64_t v) {
    const std::uint64_t low = mask & ((std::uint64_t{1} << lane_bits_) - 1);
    const std::uint64_t middle = mask >> lane_bits_ & (vectors() - 1);
    const std::uint64_t high = mask >> (lane_bits_ + block_bits_);
    Value* whole = high == 0 ? own(v ^ middle) : far(high, v ^ middle);
    if (low == 0) return whole;
    std::vector<int> order;
    for (std::uint64_t k = 0; k < width_; ++k) order.push_back(static_cast<int>(k ^ (low << 1)));
    return build_.CreateShuffleVector(whole, order);
  }

  Value* own(std::uint64_t v) {
    if (!own_[v]) own_[v] = load(unit_, unit_.vector(width_), x_, place_in(block_, v), alignment());
    return own_[v];
  }

  Value* far(std::uint64_t high, std::uint64_t v) {
    Value* other = build_.CreateXor(block_, build_.getInt64(high));
    return load(unit_, unit_.vector(width_), x_, place_in(other, v), alignment());
  }

  /// Sum of coefficients times sign vectors at vector v, each number twice: for both parts of x.
  Value* expanded(const std::vector<PreparedTerm>& terms, std::uint64_t v) {
    Value* sum = nullptr;
    const unsigned half = width_ / 2;
    for (const PreparedTerm& term : terms) {
      Value* first = build_.CreateShl(block_, lane_bits_ + block_bits_);
      Value* offset = build_.CreateAdd(first, build_.getInt64((std::uint64_t{term.vector} << plan_.bits) + v * half));
      add_product(sum, load(unit_, unit_.vector(half), prepared_, offset, half * 8), halves_.at(term.row));
    }
    std::vector<int> twice;
    for (unsigned k = 0; k < width_; ++k) twice.push_back(static_cast<int>(k / 2));
    return build_.CreateShuffleVector(sum, twice);
  }

  Unit& unit_;
  llvm::IRBuilder<>& build_;
  const SweepPlan& plan_;
  unsigned width_;
  std::uint32_t lane_bits_, block_bits_;
  FlipsByForm real_forms_, imaginary_forms_;
  Value *coefficients_ = nullptr, *prepared_ = nullptr, *x_ = nullptr, *y_ = nullptr;
  Value* block_ = nullptr;
  Block own_;
  std::map<LinearForm, Value*> scalars_;
  std::map<std::uint32_t, Value*> halves_;
};

/// The spectra of all sign vectors as two arrays: where each factor goes in `prepared`, and the factor.
std::pair<llvm::Constant*, llvm::Constant*> spectrum_arrays(Unit& unit, const SweepPlan& plan) {
  std::vector<std::uint64_t> places;
  std::vector<double> factors;
  for (std::size_t k = 0; k < plan.vectors.size(); ++k) {
    for (const auto& [z, factor] : plan.vectors[k].spectrum) {
      places.push_back((static_cast<std::uint64_t>(k) << plan.bits) + z);
      factors.push_back(factor);
    }
  }
  auto& context = unit.module.getContext();
  return {llvm::ConstantDataArray::get(context, places), llvm::ConstantDataArray::get(context, factors)};
}

/// One level of the Walsh transform for pairs `distance` apart, over all of `prepared`.
void emit_butterflies(Unit& unit, Value* prepared, Value* total, std::uint64_t distance) {
  auto& build = unit.build;
  const unsigned width = static_cast<unsigned>(std::min<std::uint64_t>(distance, unit.lanes));
  llvm::Type* type = width == 1 ? unit.real() : unit.vector(width);
  loop(unit, build.getInt64(0), total, build.getInt64(2 * distance), [&](Value* first) {
    loop(unit, first, build.CreateAdd(first, build.getInt64(distance)), build.getInt64(width), [&](Value* i) {
      Value* j = build.CreateAdd(i, build.getInt64(distance));
      Value *a = load(unit, type, prepared, i, 8), *b = load(unit, type, prepared, j, 8);
      store(unit, build.CreateFAdd(a, b), prepared, i, 8);
      store(unit, build.CreateFSub(a, b), prepared, j, 8);
    });
  });
}

}  // namespace

unsigned sweep_width(const Unit& unit, std::uint32_t bits) {
  return bits >= 3 ? unit.lanes : std::min(unit.lanes, 2u << bits);
}

llvm::Function* emit_apply(Unit& unit, const SweepPlan& plan, const std::string& name) {
  return ApplyEmitter(unit, plan).run(name);
}

llvm::Function* emit_prepare(Unit& unit, const SweepPlan& plan, const std::string& name) {
  auto& build = unit.build;
  auto* function = add_function(unit, name, {unit.pointer()}, true);
  Value* prepared = function->getArg(0);
  if (!plan.vectors.empty()) {
    const auto [places, factors] = spectrum_arrays(unit, plan);
    const std::uint64_t count = llvm::cast<llvm::ArrayType>(places->getType())->getNumElements();
    Value *place_data = constant_data(unit, "places", places), *factor_data = constant_data(unit, "factors", factors);
    Value* total = build.getInt64(plan.prepared_doubles());
    build.CreateMemSet(prepared, build.getInt8(0), plan.prepared_doubles() * 8, llvm::MaybeAlign(8));
    loop(unit, build.getInt64(0), build.getInt64(count), build.getInt64(1), [&](Value* k) {
      Value* place = build.CreateLoad(unit.index(), build.CreateGEP(unit.index(), place_data, k));
      store(unit, load(unit, unit.real(), factor_data, k, 8), prepared, place, 8);
    });
    for (std::uint32_t bit = 0; bit < plan.bits; ++bit) emit_butterflies(unit, prepared, total, std::uint64_t{1} << bit);
  }
  build.CreateRet(build.getInt32(0));
  return function;
}

}  // namespace tarn::compiler
