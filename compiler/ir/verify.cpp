#include "compiler/ir/verify.h"

#include <cmath>
#include <set>

namespace tarn::ir {
namespace {

constexpr std::uint32_t kMostBits = 40;

class Checker {
 public:
  explicit Checker(const Module& module) : module_(module) {}

  std::vector<std::string> run() {
    for (std::size_t row = 0; row < module_.tables.size(); ++row) table(module_.tables[row]);
    for (std::size_t row = 0; row < module_.values.size(); ++row) value(row);
    for (const FunctionSet& set : module_.sets) function_set(set);
    for (const Generator& one : module_.generators) generator(one);
    return std::move(broken_);
  }

 private:
  void say(std::string sentence) { broken_.push_back(std::move(sentence)); }

  void table(const Table& table) {
    const std::string name = "Table `" + table.name + "` ";
    if (table.pieces() == 0) say(name + "has no piece.");
    for (const auto& column : table.c)
      if (column.size() != table.pieces()) say(name + "has a column whose length is not its number of pieces.");
    for (std::size_t j = 1; j < table.knots.size(); ++j)
      if (!(table.knots[j - 1] < table.knots[j])) return say(name + "has knots that do not increase.");
  }

  void value(std::size_t row) {
    const Value& value = module_.values[row];
    bool known = true;
    for_each_operand(value.op, [&](ValueId operand) { known = known && operand.row < row; });
    const std::string name = "Value %" + std::to_string(row) + " ";
    if (!known) return say(name + "uses a value that does not precede it.");
    if (const auto wrong = std::visit([&](const auto& op) { return check(op, value.type); }, value.op); !wrong.empty())
      say(name + wrong);
  }

  Type type(ValueId id) const { return module_.values[id.row].type; }

  std::string check(const Constant& op, Type type) const {
    if (type == Type::truth && op.value != 0 && op.value != 1) return "is a truth other than 0 and 1.";
    return std::isnan(op.value) ? "is a constant that is not a number." : "";
  }
  std::string check(const Input& op, Type type) const {
    if (type != Type::real) return "is an input that is not real.";
    return op.slot < module_.inputs.size() ? "" : "reads an input that does not exist.";
  }
  std::string check(const ReadArgument&, Type type) const { return type == Type::real ? "" : "is an argument that is not real."; }
  std::string check(const Unary& op, Type result) const {
    const Type wanted = op.op == UnaryOp::logical_not ? Type::truth : Type::real;
    return type(op.operand) == wanted && result == wanted ? "" : "has an operand or a result of the wrong type.";
  }
  std::string check(const Binary& op, Type result) const {
    const Type wanted = op.op >= BinaryOp::logical_and ? Type::truth : Type::real;
    const Type made = op.op >= BinaryOp::less ? Type::truth : Type::real;
    const bool right = type(op.lhs) == wanted && type(op.rhs) == wanted && result == made;
    return right ? "" : "has an operand or a result of the wrong type.";
  }
  std::string check(const Select& op, Type result) const {
    if (type(op.condition) != Type::truth) return "selects by something that is no truth.";
    return type(op.then_value) == result && type(op.else_value) == result ? "" : "selects between unlike types.";
  }
  std::string check(const TableRead& op, Type result) const {
    if (op.table.row >= module_.tables.size()) return "reads a table that does not exist.";
    if (op.order > 3) return "asks for a derivative above the third.";
    return type(op.x) == Type::real && result == Type::real ? "" : "reads a table at something that is not real.";
  }

  void function_set(const FunctionSet& set) {
    const std::string name = "Set `" + set.name + "` ";
    const std::size_t count = module_.values.size();
    for (const Function& function : set.functions)
      if (function.value.row >= count) say(name + "names a value that does not exist.");
    for (const ValueId derivative : set.derivatives)
      if (derivative.row >= count) say(name + "names a derivative that does not exist.");
    if (!set.derivatives.empty() && set.derivatives.size() != set.functions.size())
      say(name + "has derivatives of some functions only.");
  }

  void generator(const Generator& generator) {
    const std::string name = "Generator `" + generator.name + "` ";
    if (module_.sets.empty()) return say(name + "has no set of coefficients.");
    if (generator.bits == 0 || generator.bits > kMostBits) return say(name + "has no sensible number of bits.");
    std::set<std::uint32_t> seen;
    for (const auto& group : generator.sum.groups) {
      if (group.coefficient >= module_.sets[0].functions.size()) say(name + "names a coefficient that does not exist.");
      if (!seen.insert(group.coefficient).second) say(name + "has two groups of one coefficient.");
      for (const auto& term : group.terms) {
        if (((term.word.x | term.word.z) >> generator.bits) != 0) say(name + "has a word beyond its bits.");
        if (!std::isfinite(std::abs(term.factor))) say(name + "has a factor that is not finite.");
      }
    }
  }

  const Module& module_;
  std::vector<std::string> broken_;
};

}  // namespace

std::vector<std::string> verify(const Module& module) { return Checker(module).run(); }

}  // namespace tarn::ir
