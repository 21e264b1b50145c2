#include "compiler/lower/generators.h"

#include <algorithm>
#include <map>
#include <utility>

#include "compiler/lower/words.h"

namespace tarn::compiler {
namespace {

using runtime::OperatorSum;
using runtime::PauliWord;
using runtime::WordTerm;

/// Lanes pay where one state does not fill the vector unit: up to three qubits.
constexpr std::uint32_t kLaneQubits = 3;

/// Collects terms by coefficient row.
class SumBuilder {
 public:
  void add(std::uint32_t row, std::complex<double> factor, const PauliWord& word) {
    terms_[row][word] += factor;
  }
  OperatorSum build() const {
    OperatorSum sum;
    for (const auto& [row, words] : terms_) {
      runtime::OperatorGroup group{row, {}};
      for (const auto& [word, factor] : words) {
        if (factor != std::complex<double>{}) group.terms.push_back({factor, word});
      }
      if (!group.terms.empty()) sum.groups.push_back(std::move(group));
    }
    return sum;
  }

 private:
  std::map<std::uint32_t, std::map<PauliWord, std::complex<double>>> terms_;
};

void add_scaled(SumBuilder& builder, const OperatorSum& sum, std::complex<double> factor) {
  for (const auto& group : sum.groups) {
    for (const WordTerm& term : group.terms) builder.add(group.coefficient, factor * term.factor, term.word);
  }
}

/// -i (H rho - rho H).
void add_commutator(SumBuilder& builder, const OperatorSum& hamiltonian, std::uint32_t bits) {
  const std::complex<double> minus_i(0, -1);
  for (const auto& group : hamiltonian.groups) {
    for (const WordTerm& term : group.terms) {
      builder.add(group.coefficient, minus_i * term.factor, side_by_side(term.word, {}, bits));
      builder.add(group.coefficient, -minus_i * term.factor * transpose_sign(term.word),
                  side_by_side({}, term.word, bits));
    }
  }
}

struct FlatTerm {
  std::uint32_t row;
  WordTerm term;
};

std::vector<FlatTerm> flatten(const OperatorSum& sum) {
  std::vector<FlatTerm> flat;
  for (const auto& group : sum.groups) {
    for (const WordTerm& term : group.terms) flat.push_back({group.coefficient, term});
  }
  return flat;
}

/// One pair of terms a, b of L: a rho b^+ - (b^+ a rho + rho b^+ a)/2. Words are Hermitian.
void add_dissipator_pair(SumBuilder& builder, std::uint32_t row, const WordTerm& a, const WordTerm& b,
                         std::uint32_t bits) {
  const std::complex<double> factor = a.factor * std::conj(b.factor);
  builder.add(row, factor * transpose_sign(b.word), side_by_side(a.word, b.word, bits));
  const WordTerm square = product(b.word, a.word);
  const std::complex<double> half = -0.5 * factor * square.factor;
  builder.add(row, half, side_by_side(square.word, {}, bits));
  builder.add(row, half * transpose_sign(square.word), side_by_side({}, square.word, bits));
}

class CoefficientProducts {
 public:
  CoefficientProducts(Rows& rows, ir::Module& module) : rows_(rows), module_(module) {}
  std::uint32_t row(std::uint32_t a, std::uint32_t b) {
    const std::pair<std::uint32_t, std::uint32_t> key = std::minmax(a, b);
    const auto found = made_.find(key);
    if (found != made_.end()) return found->second;
    const auto& functions = module_.sets[runtime::kCoefficients].functions;
    const ir::ValueId lhs = functions[key.first].value, rhs = functions[key.second].value;
    const std::string name = functions[key.first].name + " * " + functions[key.second].name;
    const ir::ValueId value = ir::append(module_, ir::Binary{ir::BinaryOp::mul, lhs, rhs});
    return made_[key] = rows_.row(value, name);
  }

 private:
  Rows& rows_;
  ir::Module& module_;
  std::map<std::pair<std::uint32_t, std::uint32_t>, std::uint32_t> made_;
};

OperatorSum liouvillian(const runtime::Chip& chip, std::uint32_t bits, Rows& rows, ir::Module& module) {
  SumBuilder builder;
  add_commutator(builder, chip.hamiltonian, bits);
  add_commutator(builder, chip.drive, bits);
  CoefficientProducts products(rows, module);
  for (const auto& jump : chip.jumps) {
    const std::vector<FlatTerm> terms = flatten(jump.op);
    for (const FlatTerm& a : terms) {
      for (const FlatTerm& b : terms) add_dissipator_pair(builder, products.row(a.row, b.row), a.term, b.term, bits);
    }
  }
  return builder.build();
}

}  // namespace

void append_generators(const runtime::Chip& chip, bool with_liouvillian, Rows& coefficients, ir::Module& module) {
  const auto bits = static_cast<std::uint32_t>(chip.qubits.size());
  const bool lanes = bits <= kLaneQubits;
  for (const std::complex<double> factor : {std::complex<double>(1, 0), std::complex<double>(0, -1)}) {
    SumBuilder builder;
    add_scaled(builder, chip.hamiltonian, factor);
    add_scaled(builder, chip.drive, factor);
    const bool is_motion = factor.imag() != 0;
    module.generators.push_back(
        {is_motion ? "schroedinger" : "hamiltonian", bits, builder.build(), {}, lanes && is_motion});
  }
  if (with_liouvillian) {
    module.generators.push_back({"liouvillian", 2 * bits, liouvillian(chip, bits, coefficients, module), {}, lanes});
  }
}

}  // namespace tarn::compiler
