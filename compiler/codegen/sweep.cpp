#include "compiler/codegen/sweep.h"

#include <algorithm>
#include <bit>
#include <map>

#include "compiler/codegen/diagonal.h"
#include "compiler/codegen/tile.h"

namespace tarn::compiler {

using llvm::Value;

namespace {

/// Flips that share one linear form.
using FlipsByForm = std::map<LinearForm, std::vector<std::uint64_t>>;

class ApplyEmitter {
 public:
  ApplyEmitter(Unit& unit, const SweepPlan& plan)
      : unit_(unit), build_(unit.build), plan_(plan), width_(sweep_width(unit, plan.bits)),
        lane_bits_(static_cast<std::uint32_t>(std::countr_zero(width_)) - 1),
        tile_(choose_tile(plan.bits, lane_bits_, unit.lanes == 8 ? 3 : 2, plan.flips.size(), !plan.diagonal)) {
    for (const Flip& flip : plan.flips) {
      if (!flip.real.empty()) real_forms_[flip.real].push_back(flip.mask);
      if (!flip.imaginary.empty()) imaginary_forms_[flip.imaginary].push_back(flip.mask);
    }
  }

  /// `summed` fills the summed diagonal, if the plan has one.
  llvm::Function* run(const std::string& name, llvm::Function* summed) {
    auto* p = unit_.pointer();
    auto* function = add_function(unit_, name, {p, p, p, p}, true);
    coefficients_ = function->getArg(0);
    prepared_ = function->getArg(1);
    x_ = function->getArg(2);
    y_ = function->getArg(3);
    function->getArg(3)->addAttr(llvm::Attribute::NoAlias);
    load_coefficients();
    if (summed) build_.CreateCall(summed, {coefficients_, summed_diagonal()});
    if (tile_.bases() == 1) {
      emit_tile(build_.getInt64(0));
    } else {
      loop(unit_, build_.getInt64(0), build_.getInt64(tile_.bases()), build_.getInt64(1), [&](Value* k) { emit_tile(k); });
    }
    build_.CreateRet(build_.getInt32(0));
    return function;
  }

 private:
  /// One number for each vector of a tile.
  using Vectors = std::vector<Value*>;

  std::uint64_t vectors() const { return tile_.vectors(); }

  /// The summed diagonal lies in the upper half of y. Tiles go upwards, and a tile reads its part
  /// before it writes: amplitude j covers doubles 2j and 2j + 1, and 2j + 1 < 2^bits + j + 1.
  Value* summed_diagonal() { return build_.CreateConstGEP1_64(unit_.real(), y_, std::uint64_t{1} << plan_.bits); }

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
          if (!weights_.contains(term.row))
            weights_[term.row] = build_.CreateVectorSplat(numbers_at_once(), load(unit_, unit_.real(), coefficients_, build_.getInt64(term.row), 8));
  }

  void emit_tile(Value* number) {
    base_ = build_.CreateShl(number, tile_.base_shift());
    own_.assign(vectors(), nullptr);
    Vectors real = sum_part(real_forms_, false);
    Vectors imaginary = sum_part(imaginary_forms_, true);
    for (std::uint64_t v = 0; v < vectors(); ++v) store(unit_, combine(real[v], imaginary[v]), y_, place(0, v, 2), alignment());
  }

  Vectors sum_part(const FlipsByForm& forms, bool imaginary) {
    Vectors sum(vectors(), nullptr);
    for (const Flip& flip : plan_.flips) {
      const auto& terms = imaginary ? flip.prepared_imaginary : flip.prepared_real;
      if (terms.empty()) continue;
      Vectors signs(vectors(), nullptr);
      for (std::uint64_t v = 0; v < vectors(); ++v) add_product(sum[v], expanded(terms, v, signs), flipped(flip.mask, v));
    }
    if (plan_.diagonal && plan_.diagonal->imaginary == imaginary) {
      Vectors signs(vectors(), nullptr);
      for (std::uint64_t v = 0; v < vectors(); ++v) add_product(sum[v], expanded({}, v, signs), own(v));
    }
    for (const auto& [form, masks] : forms) add_form(sum, scalars_.at(form), masks);
    return sum;
  }

  /// Adds scalar * (sum over masks of x flipped). What comes from other tiles goes in turns by
  /// addition, to be multiplied once, and by multiply-add: the two have ports of their own.
  void add_form(Vectors& sum, Value* scalar, const std::vector<std::uint64_t>& masks) {
    Vectors plain(vectors(), nullptr);
    std::map<std::uint64_t, std::vector<std::uint64_t>> by_rest;
    for (const std::uint64_t mask : masks) by_rest[tile_.flipped(mask, 0).rest].push_back(mask);
    bool multiply = false;
    for (const auto& [rest, same] : by_rest) {
      if (rest != 0) multiply = !multiply;
      const Vectors flips = sum_of_flips(same);
      for (std::uint64_t v = 0; v < vectors(); ++v) {
        if (rest != 0 && multiply) {
          add_product(sum[v], scalar, flips[v]);
        } else {
          plain[v] = plain[v] ? build_.CreateFAdd(plain[v], flips[v]) : flips[v];
        }
      }
    }
    for (std::uint64_t v = 0; v < vectors(); ++v)
      if (plain[v]) add_product(sum[v], scalar, plain[v]);
  }

  /// Sum over masks with one rest. Two vectors that see the same pair of others share their sum.
  Vectors sum_of_flips(const std::vector<std::uint64_t>& masks) {
    Vectors sums(vectors(), nullptr);
    std::map<std::vector<Value*>, Value*> made;
    for (std::uint64_t v = 0; v < vectors(); ++v) {
      std::vector<Value*> parts;
      for (const std::uint64_t mask : masks) parts.push_back(flipped(mask, v));
      std::sort(parts.begin(), parts.end());
      Value*& sum = made[parts];
      if (!sum)
        for (const std::uint64_t mask : masks) sum = sum ? build_.CreateFAdd(sum, flipped(mask, v)) : flipped(mask, v);
      sums[v] = sum;
    }
    return sums;
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
    if (real) return multiply_add(unit_, turned, llvm::ConstantVector::get(signs), real);
    return flip_even_signs(turned);
  }

  /// By exclusive or, which does not compete with the additions and multiplications.
  Value* flip_even_signs(Value* x) {
    std::vector<llvm::Constant*> masks;
    for (unsigned k = 0; k < width_; ++k) masks.push_back(build_.getInt64((k & 1) != 0 ? 0 : std::uint64_t{1} << 63));
    auto* bits = llvm::FixedVectorType::get(unit_.index(), width_);
    Value* flipped = build_.CreateXor(build_.CreateBitCast(x, bits), llvm::ConstantVector::get(masks));
    return build_.CreateBitCast(flipped, x->getType());
  }

  unsigned alignment() const { return width_ * 8; }

  /// Offset of vector v of the tile that lies `rest` away, with so many numbers an amplitude.
  Value* place(std::uint64_t rest, std::uint64_t v, std::uint64_t numbers) {
    Value* far = build_.CreateXor(base_, build_.getInt64(rest ^ tile_.far_offset(v)));
    return build_.CreateAdd(build_.CreateMul(far, build_.getInt64(numbers)), build_.getInt64(tile_.near_offset(v) * numbers));
  }

  /// Vector v of the tile as it stands in x ^ mask. Shuffles and loads are made once.
  Value* flipped(std::uint64_t mask, std::uint64_t v) {
    const std::uint64_t low = mask & ((std::uint64_t{1} << lane_bits_) - 1);
    const Place where = tile_.flipped(mask, v);
    Value* whole = where.rest == 0 ? own(where.vector) : far(where);
    if (low == 0) return whole;
    std::vector<int> order;
    for (std::uint64_t k = 0; k < width_; ++k) order.push_back(static_cast<int>(k ^ (low << 1)));
    return build_.CreateShuffleVector(whole, order);
  }

  Value* own(std::uint64_t v) {
    if (!own_[v]) own_[v] = load(unit_, unit_.vector(width_), x_, place(0, v, 2), alignment());
    return own_[v];
  }

  /// The rest read last is kept: flips that share it follow one another.
  Value* far(const Place& where) {
    if (where.rest != kept_rest_ || kept_base_ != base_) {
      kept_.assign(vectors(), nullptr);
      kept_rest_ = where.rest;
      kept_base_ = base_;
    }
    Value*& vector = kept_[where.vector];
    if (!vector) vector = load(unit_, unit_.vector(width_), x_, place(where.rest, where.vector, 2), alignment());
    return vector;
  }

  /// Sum of coefficients times sign vectors at vector v, each number twice: for both parts of x.
  /// No terms stand for the summed diagonal.
  /// `sums` keeps what one load gives: the numbers of two neighbours, or of one if there are none.
  Value* expanded(const std::vector<PreparedTerm>& terms, std::uint64_t v, Vectors& sums) {
    const std::uint64_t first = numbers_at_once() == width_ ? v & ~std::uint64_t{1} : v;
    if (!sums[first]) sums[first] = weighted_signs(terms, first);
    std::vector<int> twice;
    const std::uint64_t offset = (v - first) * (width_ / 2);
    for (unsigned k = 0; k < width_; ++k) twice.push_back(static_cast<int>(offset + k / 2));
    return build_.CreateShuffleVector(sums[first], twice);
  }

  unsigned numbers_at_once() const { return tile_.vectors() == 1 ? width_ / 2 : width_; }

  /// The sum itself, from vector v of the tile on.
  Value* weighted_signs(const std::vector<PreparedTerm>& terms, std::uint64_t v) {
    Value* sum = nullptr;
    const unsigned numbers = numbers_at_once();
    if (terms.empty()) return load(unit_, unit_.vector(numbers), summed_diagonal(), place(0, v, 1), numbers * 8);
    for (const PreparedTerm& term : terms) {
      Value* offset = build_.CreateAdd(place(0, v, 1), build_.getInt64(std::uint64_t{term.vector} << plan_.bits));
      add_product(sum, load(unit_, unit_.vector(numbers), prepared_, offset, numbers * 8), weights_.at(term.row));
    }
    return sum;
  }

  Unit& unit_;
  llvm::IRBuilder<>& build_;
  const SweepPlan& plan_;
  unsigned width_;
  std::uint32_t lane_bits_;
  Tile tile_;
  FlipsByForm real_forms_, imaginary_forms_;
  Value *coefficients_ = nullptr, *prepared_ = nullptr, *x_ = nullptr, *y_ = nullptr;
  Value* base_ = nullptr;  ///< First amplitude of the tile.
  Vectors own_, kept_;
  std::uint64_t kept_rest_ = 0;
  Value* kept_base_ = nullptr;
  std::map<LinearForm, Value*> scalars_;
  std::map<std::uint32_t, Value*> weights_;  ///< Coefficients beside sign vectors.
};

}  // namespace

unsigned sweep_width(const Unit& unit, std::uint32_t bits) {
  return bits >= 3 ? unit.lanes : std::min(unit.lanes, 2u << bits);
}

llvm::Function* emit_apply(Unit& unit, const SweepPlan& plan, const std::string& name) {
  llvm::Function* summed = plan.diagonal ? emit_summed_diagonal(unit, plan, name + "_diagonal") : nullptr;
  return ApplyEmitter(unit, plan).run(name, summed);
}

}  // namespace tarn::compiler
