#include "tests/unit/compiler/support/random_module.h"

#include <algorithm>
#include <map>

namespace tarn::test {

using namespace ir;

namespace {

double uniform(std::mt19937& random, double low, double high) {
  return low + (high - low) * (static_cast<double>(random()) / 4294967296.0);
}

std::uint32_t below(std::mt19937& random, std::size_t count) { return static_cast<std::uint32_t>(random() % count); }

class Grower {
 public:
  Grower(Module& module, std::mt19937& random) : module_(module), random_(random) {
    for (const Argument argument : {Argument::s, Argument::t, Argument::w}) reals_.push_back(append(module_, ReadArgument{argument}));
    for (std::uint32_t slot = 0; slot < module_.inputs.size(); ++slot) reals_.push_back(append(module_, Input{slot}));
    for (const double number : {0.0, 1.0, 2.0, -0.75, 0.3}) reals_.push_back(append(module_, Constant{number}));
    truths_.push_back(append(module_, Binary{BinaryOp::less, reals_[0], reals_[3]}, Type::truth));
  }

  ValueId grow(int steps) {
    for (int step = 0; step < steps; ++step) add_one();
    return reals_.back();
  }

 private:
  ValueId real() {
    const std::size_t recent = std::min<std::size_t>(reals_.size(), 12);
    return reals_[reals_.size() - 1 - below(random_, recent)];
  }
  ValueId truth() { return truths_[below(random_, truths_.size())]; }

  void add_one() {
    switch (below(random_, 8)) {
      case 0:
      case 1: reals_.push_back(append(module_, Unary{static_cast<UnaryOp>(below(random_, 16)), real()})); break;
      case 2:
      case 3:
      case 4: reals_.push_back(append(module_, Binary{static_cast<BinaryOp>(below(random_, 8)), real(), real()})); break;
      case 5: add_truth(); break;
      case 6: reals_.push_back(append(module_, Select{truth(), real(), real()})); break;
      default:
        reals_.push_back(append(module_, TableRead{TableId{below(random_, module_.tables.size())}, real(),
                                                   static_cast<std::uint8_t>(below(random_, 4)), static_cast<Outside>(below(random_, 2))}));
    }
  }

  void add_truth() {
    const auto op = static_cast<BinaryOp>(8 + below(random_, 6));
    const bool logic = op >= BinaryOp::logical_and;
    const ValueId lhs = logic ? truth() : real(), rhs = logic ? truth() : real();
    truths_.push_back(append(module_, Binary{op, lhs, rhs}, Type::truth));
    if (below(random_, 3) == 0) truths_.push_back(append(module_, Unary{UnaryOp::logical_not, truth()}, Type::truth));
  }

  Module& module_;
  std::mt19937& random_;
  std::vector<ValueId> reals_, truths_;
};

}  // namespace

Table random_table(std::mt19937& random, const std::string& name, std::size_t pieces, double low, double high) {
  Table table;
  table.name = name;
  for (std::size_t j = 0; j <= pieces; ++j)
    table.knots.push_back(low + (high - low) * (static_cast<double>(j) + (j > 0 && j < pieces ? uniform(random, -0.3, 0.3) : 0)) / static_cast<double>(pieces));
  for (auto& column : table.c)
    for (std::size_t j = 0; j < pieces; ++j) column.push_back(uniform(random, -1, 1));
  return table;
}

Module random_functions(unsigned seed, std::uint32_t functions) {
  std::mt19937 random(seed);
  Module module;
  module.name = "random";
  module.inputs = {"a", "b", "c"};
  module.tables = {random_table(random, "five", 5, -1, 2), random_table(random, "one", 1, 0, 1)};
  module.sets.push_back({"coefficients", {}, false, {}});
  Grower grower(module, random);
  for (std::uint32_t k = 0; k < functions; ++k) module.sets[0].functions.push_back({"f" + std::to_string(k), grower.grow(6)});
  return module;
}

void add_random_generator(Module& module, unsigned seed, std::uint32_t bits, std::size_t words, bool real_factors) {
  std::mt19937 random(seed);
  Generator generator;
  generator.name = "G" + std::to_string(module.generators.size());
  generator.bits = bits;
  std::map<std::uint32_t, std::vector<runtime::WordTerm>> groups;
  const std::uint64_t mask = (std::uint64_t{1} << bits) - 1;
  for (std::size_t k = 0; k < words; ++k) {
    const runtime::PauliWord word{random() & mask & (random() % 3 == 0 ? ~std::uint64_t{0} : random()), random() & mask};
    const double imaginary = real_factors || random() % 2 == 0 ? 0 : uniform(random, -1, 1);
    groups[below(random, module.sets[0].functions.size())].push_back({{uniform(random, -1, 1), imaginary}, word});
  }
  for (auto& [row, terms] : groups) generator.sum.groups.push_back({row, std::move(terms)});
  module.generators.push_back(std::move(generator));
}

Module simple_coefficients(std::uint32_t rows) {
  Module module;
  module.name = "simple";
  module.sets.push_back({"coefficients", {}, false, {}});
  const ValueId s = append(module, ReadArgument{Argument::s});
  for (std::uint32_t row = 0; row < rows; ++row) {
    const ValueId offset = append(module, Constant{0.5 + row});
    module.sets[0].functions.push_back({"c" + std::to_string(row), append(module, Binary{BinaryOp::add, s, offset})});
  }
  return module;
}

}  // namespace tarn::test
