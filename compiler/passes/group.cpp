#include "compiler/passes/group.h"

#include <complex>
#include <map>

#include "compiler/passes/build.h"
#include "lang/support/check.h"

namespace tarn::compiler {

using namespace ir;
using runtime::OperatorSum;
using runtime::PauliWord;

namespace {

/// multiple * value; without a value the multiple alone.
struct Scaled {
  double multiple = 1;
  std::optional<ValueId> value;
};

Scaled split(const Module& module, ValueId id) {
  Scaled result{1, id};
  for (;;) {
    const Op& op = module.values[result.value->row].op;
    if (const auto number = constant_of(module, *result.value)) return {result.multiple * *number, std::nullopt};
    const auto* negated = std::get_if<Unary>(&op);
    const auto* pair = std::get_if<Binary>(&op);
    if (negated && negated->op == UnaryOp::neg) {
      result = {-result.multiple, negated->operand};
    } else if (pair && pair->op == BinaryOp::mul && constant_of(module, pair->lhs)) {
      result = {result.multiple * *constant_of(module, pair->lhs), pair->rhs};
    } else if (pair && pair->op == BinaryOp::mul && constant_of(module, pair->rhs)) {
      result = {result.multiple * *constant_of(module, pair->rhs), pair->lhs};
    } else if (pair && pair->op == BinaryOp::div && constant_of(module, pair->rhs)) {
      result = {result.multiple / *constant_of(module, pair->rhs), pair->lhs};
    } else {
      return result;
    }
  }
}

class Grouper {
 public:
  explicit Grouper(const Module& module) : module_(module) {
    for (const FunctionSet& set : module_.sets) TARN_CHECK(set.derivatives.empty());
  }

  Module run() {
    for (Generator& generator : module_.generators) generator.sum = grouped(generator.sum);
    return std::move(module_);
  }

 private:
  OperatorSum grouped(const OperatorSum& sum) {
    std::map<std::uint32_t, std::map<PauliWord, std::complex<double>>> words;
    for (const auto& group : sum.groups) {
      const Scaled scaled = split(module_, module_.sets[0].functions[group.coefficient].value);
      if (scaled.multiple == 0) continue;
      auto& into = words[row_of(scaled, group.coefficient)];
      for (const auto& term : group.terms) into[term.word] += scaled.multiple * term.factor;
    }
    OperatorSum result;
    for (const auto& [row, terms] : words) {
      runtime::OperatorGroup group{row, {}};
      for (const auto& [word, factor] : terms)
        if (factor != 0.0) group.terms.push_back({factor, word});
      if (!group.terms.empty()) result.groups.push_back(std::move(group));
    }
    return result;
  }

  /// The first row of set 0 whose value is the common one, or a new row at the end.
  std::uint32_t row_of(const Scaled& scaled, std::uint32_t asked) {
    std::vector<Function>& functions = module_.sets[0].functions;
    for (std::uint32_t row = 0; row < functions.size(); ++row) {
      const auto number = constant_of(module_, functions[row].value);
      if (scaled.value ? functions[row].value == *scaled.value : number == 1.0) return row;
    }
    const ValueId value = scaled.value ? *scaled.value : constant(module_, 1);
    functions.push_back({scaled.value ? functions[asked].name + " (common)" : "1", value});
    return static_cast<std::uint32_t>(functions.size() - 1);
  }

  Module module_;
};

}  // namespace

Module group(const Module& module) { return Grouper(module).run(); }

}  // namespace tarn::compiler
