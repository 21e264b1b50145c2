#include "compiler/codegen/diagonal.h"

#include <algorithm>
#include <bit>

namespace tarn::compiler {

using llvm::Value;

namespace {

/// One Walsh transform over `bits` bits of every 2^bits numbers among `total`, from bit `first` on.
class Transform {
 public:
  Transform(Unit& unit, Value* data, std::uint64_t total, std::uint32_t bits)
      : unit_(unit), build_(unit.build), data_(data), total_(total), bits_(bits) {}

  /// Up to three bits in one pass over the data, the rest in further ones.
  void run(std::uint32_t first) {
    for (std::uint32_t bit = first; bit < bits_;) {
      const std::uint32_t at_once = (std::uint64_t{1} << bit) < unit_.lanes ? 1 : std::min(3u, bits_ - bit);
      pass(bit, at_once);
      bit += at_once;
    }
  }

 private:
  void pass(std::uint32_t bit, std::uint32_t at_once) {
    const std::uint64_t distance = std::uint64_t{1} << bit;
    const std::uint64_t step = std::min<std::uint64_t>(distance, unit_.lanes);
    const auto number = [&](std::uint64_t value) { return build_.getInt64(value); };
    loop(unit_, number(0), number(total_), number(distance << at_once), [&](Value* first) {
      loop(unit_, first, build_.CreateAdd(first, number(distance)), number(step),
           [&](Value* place) { butterflies(place, distance, at_once, static_cast<unsigned>(step)); });
    });
  }

  void butterflies(Value* place, std::uint64_t distance, std::uint32_t levels, unsigned width) {
    llvm::Type* type = width == 1 ? unit_.real() : unit_.vector(width);
    const auto at = [&](std::uint64_t k) { return build_.CreateAdd(place, build_.getInt64(k * distance)); };
    std::vector<Value*> x;
    for (std::uint64_t k = 0; k >> levels == 0; ++k) x.push_back(load(unit_, type, data_, at(k), width * 8));
    for (std::uint32_t level = 0; level < levels; ++level)
      for (std::size_t k = 0; k < x.size(); ++k) {
        const std::size_t partner = k ^ (std::size_t{1} << level);
        if (partner < k) continue;
        Value *sum = build_.CreateFAdd(x[k], x[partner]), *difference = build_.CreateFSub(x[k], x[partner]);
        x[k] = sum;
        x[partner] = difference;
      }
    for (std::uint64_t k = 0; k < x.size(); ++k) store(unit_, x[k], data_, at(k), width * 8);
  }

  Unit& unit_;
  llvm::IRBuilder<>& build_;
  Value* data_;
  std::uint64_t total_;
  std::uint32_t bits_;
};

template <class Number>
Value* array(Unit& unit, const std::string& name, const std::vector<Number>& numbers) {
  return constant_data(unit, name, llvm::ConstantDataArray::get(unit.module.getContext(), numbers));
}

/// Scatters the factors of all sign vectors to their places in `prepared`, which is zero before.
void scatter(Unit& unit, const SweepPlan& plan, Value* prepared) {
  std::vector<std::uint64_t> places;
  std::vector<double> factors;
  for (std::size_t k = 0; k < plan.vectors.size(); ++k) {
    for (const auto& [z, factor] : plan.vectors[k].spectrum) {
      places.push_back((static_cast<std::uint64_t>(k) << plan.bits) + z);
      factors.push_back(factor);
    }
  }
  auto& build = unit.build;
  Value *place_data = array(unit, "places", places), *factor_data = array(unit, "factors", factors);
  loop(unit, build.getInt64(0), build.getInt64(places.size()), build.getInt64(1), [&](Value* k) {
    Value* place = build.CreateLoad(unit.index(), build.CreateGEP(unit.index(), place_data, k));
    store(unit, load(unit, unit.real(), factor_data, k, 8), prepared, place, 8);
  });
}

/// The terms of a summed diagonal as arrays: where a term's vector stands, its signs, row and factor.
struct Terms {
  std::vector<std::uint64_t> places, signs, rows;
  std::vector<double> factors;
};

/// The lowest bits are transformed at once: a term adds a whole vector of signs.
Terms terms_of(const SweepPlan& plan, unsigned width) {
  Terms terms;
  for (const auto& [z, form] : plan.diagonal->spectrum)
    for (const auto& [row, factor] : form) {
      terms.places.push_back(z & ~std::uint64_t{width - 1});
      terms.signs.push_back((z & (width - 1)) * width);
      terms.rows.push_back(row);
      terms.factors.push_back(factor);
    }
  return terms;
}

/// Row z of this table holds (-1)^popcount(z & k) for k < width.
std::vector<double> sign_table(unsigned width) {
  std::vector<double> signs;
  for (unsigned z = 0; z < width; ++z)
    for (unsigned k = 0; k < width; ++k) signs.push_back((std::popcount(z & k) & 1) != 0 ? -1 : 1);
  return signs;
}

}  // namespace

llvm::Function* emit_prepare(Unit& unit, const SweepPlan& plan, const std::string& name) {
  auto& build = unit.build;
  auto* function = add_function(unit, name, {unit.pointer()}, true);
  Value* prepared = function->getArg(0);
  if (!plan.vectors.empty()) {
    build.CreateMemSet(prepared, build.getInt8(0), plan.prepared_doubles() * 8, llvm::MaybeAlign(8));
    scatter(unit, plan, prepared);
    Transform(unit, prepared, plan.prepared_doubles(), plan.bits).run(0);
  }
  build.CreateRet(build.getInt32(0));
  return function;
}

llvm::Function* emit_summed_diagonal(Unit& unit, const SweepPlan& plan, const std::string& name) {
  auto& build = unit.build;
  auto* function = add_function(unit, name, {unit.pointer(), unit.pointer()}, false);
  Value *coefficients = function->getArg(0), *d = function->getArg(1);
  const unsigned width = unit.lanes;
  const Terms terms = terms_of(plan, width);
  Value *places = array(unit, "places", terms.places), *signs = array(unit, "signs", terms.signs);
  Value *rows = array(unit, "rows", terms.rows), *factors = array(unit, "factors", terms.factors);
  Value* table = array(unit, "sign_table", sign_table(width));
  const std::uint64_t size = std::uint64_t{1} << plan.bits;
  build.CreateMemSet(d, build.getInt8(0), size * 8, llvm::MaybeAlign(64));
  loop(unit, build.getInt64(0), build.getInt64(terms.places.size()), build.getInt64(1), [&](Value* k) {
    const auto entry = [&](Value* from) { return build.CreateLoad(unit.index(), build.CreateGEP(unit.index(), from, k)); };
    Value* coefficient = load(unit, unit.real(), coefficients, entry(rows), 8);
    Value* weight = build.CreateFMul(coefficient, load(unit, unit.real(), factors, k, 8));
    Value* place = entry(places);
    Value* before = load(unit, unit.vector(width), d, place, width * 8);
    Value* sign = load(unit, unit.vector(width), table, entry(signs), width * 8);
    store(unit, multiply_add(unit, build.CreateVectorSplat(width, weight), sign, before), d, place, width * 8);
  });
  Transform(unit, d, size, plan.bits).run(static_cast<std::uint32_t>(std::countr_zero(width)));
  build.CreateRet(build.getInt32(0));
  return function;
}

}  // namespace tarn::compiler
