#include <charconv>
#include <optional>

#include "compiler/ir/spelling.h"
#include "compiler/ir/text.h"

namespace tarn::ir {
namespace {

constexpr std::size_t kMostPieces = 1u << 22;

template <std::size_t N>
std::optional<std::size_t> find_word(const std::array<std::string_view, N>& words, std::string_view word) {
  for (std::size_t k = 0; k < N; ++k)
    if (words[k] == word) return k;
  return std::nullopt;
}

bool gives_truth(UnaryOp op) { return op == UnaryOp::logical_not; }
bool gives_truth(BinaryOp op) { return op >= BinaryOp::less; }

/// Reads token by token. The first failure sticks; later reads give zeros and nothing loops on them.
class Reader {
 public:
  explicit Reader(std::string_view text) : rest_(text) { advance(); }

  Result<Module, TextError> read() {
    expect("tarn-ir");
    expect("1");
    expect("module");
    module_.name = quoted();
    while (!failed() && !token_.empty()) statement();
    if (failed()) return Unexpected{error_};
    return std::move(module_);
  }

 private:
  bool failed() const { return !error_.message.empty(); }

  void fail(std::string message) {
    if (!failed()) error_ = {line_, std::move(message)};
    token_ = {};
    rest_ = {};
  }

  void skip_blank() {
    while (!rest_.empty()) {
      if (rest_[0] == '#') {
        rest_.remove_prefix(std::min(rest_.find('\n'), rest_.size()));
      } else if (rest_[0] == ' ' || rest_[0] == '\n') {
        if (rest_[0] == '\n') ++line_;
        rest_.remove_prefix(1);
      } else {
        return;
      }
    }
  }

  static std::size_t quoted_length(std::string_view text) {
    std::size_t end = 1;
    while (end < text.size() && text[end] != '"') end += text[end] == '\\' ? 2u : 1u;
    return std::min(end + 1, text.size());
  }

  void advance() {
    skip_blank();
    const std::size_t length = rest_.starts_with('"') ? quoted_length(rest_) : std::min(rest_.find_first_of(" \n"), rest_.size());
    token_ = rest_.substr(0, length);
    rest_.remove_prefix(length);
  }

  bool accept(std::string_view word) {
    if (token_ != word) return false;
    advance();
    return true;
  }

  void expect(std::string_view word) {
    if (!accept(word)) fail("expected `" + std::string(word) + "`, found `" + std::string(token_) + "`");
  }

  template <class Number>
  Number number_of(std::string_view digits, int base = 10) {
    Number value{};
    std::from_chars_result read{};
    if constexpr (std::is_same_v<Number, double>) {
      read = std::from_chars(digits.data(), digits.data() + digits.size(), value);
    } else {
      read = std::from_chars(digits.data(), digits.data() + digits.size(), value, base);
    }
    if (digits.empty() || read.ec != std::errc{} || read.ptr != digits.data() + digits.size()) {
      fail("expected a number, found `" + std::string(digits) + "`");
      return {};
    }
    return value;
  }

  template <class Number>
  Number number(int base = 10) {
    const std::string_view digits = token_;
    const auto value = number_of<Number>(digits, base);
    if (!failed()) advance();
    return value;
  }

  ValueId value_id() {
    if (!token_.starts_with('%')) return fail("expected a value, found `" + std::string(token_) + "`"), ValueId{};
    const ValueId id{number_of<std::uint32_t>(token_.substr(1))};
    if (!failed()) advance();
    return id;
  }

  std::string quoted() {
    if (token_.size() < 2 || token_.front() != '"' || token_.back() != '"') return fail("expected a quoted name"), "";
    std::string name;
    const std::string_view body = token_.substr(1, token_.size() - 2);
    for (std::size_t k = 0; k < body.size(); ++k) {
      if (body[k] != '\\') {
        name += body[k];
      } else if (k + 3 < body.size() && body[k + 1] == 'x') {
        name += static_cast<char>(number_of<unsigned>(body.substr(k + 2, 2), 16));
        k += 3;
      } else if (k + 1 < body.size()) {
        name += body[++k];
      }
    }
    if (!failed()) advance();
    return name;
  }

  void statement() {
    if (token_.starts_with('%')) return value();
    if (accept("input")) return module_.inputs.push_back(quoted());
    if (accept("table")) return table();
    if (accept("set")) return set();
    if (accept("generator")) return generator();
    fail("expected a statement, found `" + std::string(token_) + "`");
  }

  std::vector<double> numbers(std::string_view head, std::size_t count) {
    expect(head);
    std::vector<double> read;
    while (read.size() < count && !failed()) read.push_back(number<double>());
    return read;
  }

  void table() {
    Table table;
    table.name = quoted();
    expect("pieces");
    const auto pieces = number<std::size_t>();
    if (pieces > kMostPieces) return fail("a table has too many pieces");
    table.knots.resize(pieces == 0 ? 0 : pieces + 1);
    module_.tables.push_back(std::move(table));
    if (token_ != "knots") {
      Module shape;
      shape.tables.push_back(std::move(module_.tables.back()));
      module_.tables.back() = shape_only(std::move(shape)).tables[0];
      return;
    }
    Table& read = module_.tables.back();
    read.knots = numbers("knots", read.knots.size());
    constexpr std::string_view kHeads[] = {"c0", "c1", "c2", "c3"};
    for (std::size_t k = 0; k < 4; ++k) read.c[k] = numbers(kHeads[k], pieces);
  }

  void value() {
    const ValueId id = value_id();
    if (!failed() && id.row != module_.values.size()) fail("values are numbered in order, without gaps");
    expect("=");
    const std::string_view word = token_;
    if (!failed()) advance();
    Value value;
    if (!failed()) value = operation(word);
    if (!failed()) module_.values.push_back(value);
  }

  Value operation(std::string_view word) {
    if (word == "constant") return constant();
    if (word == "input") return {Input{number<std::uint32_t>()}};
    if (word == "argument") return {ReadArgument{one_of<Argument>(kArgumentWords)}};
    if (word == "table") return table_read();
    if (word == "select" || word == "select_truth") {
      const ValueId condition = value_id(), then_value = value_id(), else_value = value_id();
      return {Select{condition, then_value, else_value}, word == "select" ? Type::real : Type::truth};
    }
    if (const auto found = find_word(kUnaryWords, word)) {
      const auto op = static_cast<UnaryOp>(*found);
      return {Unary{op, value_id()}, gives_truth(op) ? Type::truth : Type::real};
    }
    if (const auto found = find_word(kBinaryWords, word)) {
      const auto op = static_cast<BinaryOp>(*found);
      const ValueId lhs = value_id(), rhs = value_id();
      return {Binary{op, lhs, rhs}, gives_truth(op) ? Type::truth : Type::real};
    }
    fail("unknown operation `" + std::string(word) + "`");
    return {};
  }

  template <class Enum, std::size_t N>
  Enum one_of(const std::array<std::string_view, N>& words) {
    const auto found = find_word(words, token_);
    if (!found) return fail("unexpected word `" + std::string(token_) + "`"), Enum{};
    advance();
    return static_cast<Enum>(*found);
  }

  Value constant() {
    if (accept("true")) return {Constant{1}, Type::truth};
    if (accept("false")) return {Constant{0}, Type::truth};
    return {Constant{number<double>()}};
  }

  Value table_read() {
    TableRead read;
    read.table.row = number<std::uint32_t>();
    read.x = value_id();
    expect("order");
    read.order = number<std::uint8_t>();
    read.outside = one_of<Outside>(kOutsideWords);
    return {read};
  }

  void set() {
    FunctionSet set;
    set.name = quoted();
    set.differentiate = accept("differentiate");
    while (accept("function")) {
      Function function;
      function.name = quoted();
      function.value = value_id();
      set.functions.push_back(std::move(function));
      if (accept("derivative")) set.derivatives.push_back(value_id());
    }
    module_.sets.push_back(std::move(set));
  }

  void generator() {
    Generator generator;
    generator.name = quoted();
    expect("bits");
    generator.bits = number<std::uint32_t>();
    generator.lanes = accept("lanes");
    generator.structure.real_words = accept("real");
    generator.structure.imaginary = accept("imaginary");
    generator.structure.diagonal = accept("diagonal");
    while (accept("group")) {
      generator.sum.groups.push_back({number<std::uint32_t>(), {}});
      while (accept("term")) generator.sum.groups.back().terms.push_back(term());
    }
    module_.generators.push_back(std::move(generator));
  }

  runtime::WordTerm term() {
    const auto re = number<double>(), im = number<double>();
    expect("x");
    const auto x = number<std::uint64_t>(16);
    expect("z");
    const auto z = number<std::uint64_t>(16);
    return {{re, im}, {x, z}};
  }

  std::string_view rest_;
  std::string_view token_;
  std::size_t line_ = 1;
  Module module_;
  TextError error_;
};

}  // namespace

Result<Module, TextError> from_text(std::string_view text) { return Reader(text).read(); }

}  // namespace tarn::ir
