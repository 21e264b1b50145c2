#include <charconv>
#include <complex>

#include "compiler/ir/spelling.h"
#include "compiler/ir/text.h"

namespace tarn::ir {
namespace {

using runtime::PauliWord;
using runtime::WordTerm;

void write_number(std::string& out, double number) {
  char digits[40];
  const auto end = std::to_chars(digits, digits + sizeof digits, number).ptr;
  out.append(digits, end);
}

void write_count(std::string& out, std::uint64_t number, int base = 10) {
  char digits[24];
  const auto end = std::to_chars(digits, digits + sizeof digits, number, base).ptr;
  out.append(digits, end);
}

void write_value_id(std::string& out, ValueId id) {
  out += " %";
  write_count(out, id.row);
}

void write_quoted(std::string& out, std::string_view name) {
  constexpr std::string_view kHex = "0123456789abcdef";
  out += '"';
  for (const char c : name) {
    const auto byte = static_cast<unsigned char>(c);
    if (c == '"' || c == '\\') {
      out += '\\';
      out += c;
    } else if (byte < 0x20) {
      out += "\\x";
      out += kHex[byte >> 4];
      out += kHex[byte & 15];
    } else {
      out += c;
    }
  }
  out += '"';
}

void write_numbers(std::string& out, std::string_view head, const std::vector<double>& numbers) {
  out += head;
  for (const double number : numbers) {
    out += ' ';
    write_number(out, number);
  }
  out += '\n';
}

bool is_shape_only(const Table& table) {
  Module holder;
  holder.tables.push_back(table);
  return shape_only(std::move(holder)).tables[0] == table;
}

void write_table(std::string& out, const Table& table) {
  out += "table ";
  write_quoted(out, table.name);
  out += " pieces ";
  write_count(out, table.pieces());
  out += '\n';
  if (is_shape_only(table)) return;
  write_numbers(out, "knots", table.knots);
  constexpr std::string_view kHeads[] = {"c0", "c1", "c2", "c3"};
  for (std::size_t k = 0; k < 4; ++k) write_numbers(out, kHeads[k], table.c[k]);
}

struct OpWriter {
  std::string& out;
  Type type;

  void operator()(const Constant& op) const {
    out += "constant ";
    if (type == Type::truth) {
      out += op.value != 0 ? "true" : "false";
    } else {
      write_number(out, op.value);
    }
  }
  void operator()(const Input& op) const {
    out += "input ";
    write_count(out, op.slot);
  }
  void operator()(const ReadArgument& op) const {
    out += "argument ";
    out += word_of(kArgumentWords, op.argument);
  }
  void operator()(const Unary& op) const {
    out += word_of(kUnaryWords, op.op);
    write_value_id(out, op.operand);
  }
  void operator()(const Binary& op) const {
    out += word_of(kBinaryWords, op.op);
    write_value_id(out, op.lhs);
    write_value_id(out, op.rhs);
  }
  void operator()(const Select& op) const {
    out += type == Type::truth ? "select_truth" : "select";
    write_value_id(out, op.condition);
    write_value_id(out, op.then_value);
    write_value_id(out, op.else_value);
  }
  void operator()(const TableRead& op) const {
    out += "table ";
    write_count(out, op.table.row);
    write_value_id(out, op.x);
    out += " order ";
    write_count(out, op.order);
    out += ' ';
    out += word_of(kOutsideWords, op.outside);
  }
};

void write_set(std::string& out, const FunctionSet& set) {
  out += "set ";
  write_quoted(out, set.name);
  out += set.differentiate ? " differentiate\n" : "\n";
  for (std::size_t row = 0; row < set.functions.size(); ++row) {
    out += "function ";
    write_quoted(out, set.functions[row].name);
    write_value_id(out, set.functions[row].value);
    if (row < set.derivatives.size()) {
      out += " derivative";
      write_value_id(out, set.derivatives[row]);
    }
    out += '\n';
  }
}

std::string letters(const PauliWord& word, std::uint32_t bits) {
  std::string text;
  for (std::uint32_t bit = bits; bit-- > 0;) {
    const bool x = (word.x >> bit & 1) != 0, z = (word.z >> bit & 1) != 0;
    text += x ? (z ? 'Y' : 'X') : (z ? 'Z' : 'I');
  }
  return text;
}

void write_term(std::string& out, const WordTerm& term) {
  out += "term ";
  write_number(out, term.factor.real());
  out += ' ';
  write_number(out, term.factor.imag());
  out += " x ";
  write_count(out, term.word.x, 16);
  out += " z ";
  write_count(out, term.word.z, 16);
}

void write_generator(std::string& out, const Module& module, const Generator& generator, bool comments) {
  out += "generator ";
  write_quoted(out, generator.name);
  out += " bits ";
  write_count(out, generator.bits);
  if (generator.lanes) out += " lanes";
  if (generator.structure.real_words) out += " real";
  if (generator.structure.imaginary) out += " imaginary";
  if (generator.structure.diagonal) out += " diagonal";
  out += '\n';
  for (const auto& group : generator.sum.groups) {
    out += "group ";
    write_count(out, group.coefficient);
    if (comments && !module.sets.empty() && group.coefficient < module.sets[0].functions.size()) {
      out += "  # times ";
      write_quoted(out, module.sets[0].functions[group.coefficient].name);
    }
    out += '\n';
    for (const WordTerm& term : group.terms) {
      write_term(out, term);
      if (comments) out += "  # " + letters(term.word, generator.bits);
      out += '\n';
    }
  }
}

std::string write(const Module& module, bool comments) {
  std::string out = "tarn-ir 1\nmodule ";
  write_quoted(out, module.name);
  out += '\n';
  for (const std::string& input : module.inputs) {
    out += "input ";
    write_quoted(out, input);
    out += '\n';
  }
  for (const Table& table : module.tables) write_table(out, table);
  for (std::uint32_t row = 0; row < module.values.size(); ++row) {
    const Value& value = module.values[row];
    out += '%';
    write_count(out, row);
    out += " = ";
    std::visit(OpWriter{out, value.type}, value.op);
    const auto* input = std::get_if<Input>(&value.op);
    if (comments && input && input->slot < module.inputs.size()) out += "  # " + module.inputs[input->slot];
    out += '\n';
  }
  for (const FunctionSet& set : module.sets) write_set(out, set);
  for (const Generator& generator : module.generators) write_generator(out, module, generator, comments);
  return out;
}

}  // namespace

std::string to_text(const Module& module) { return write(module, false); }

std::string print(const Module& module) { return write(module, true); }

Module shape_only(Module module) {
  for (Table& table : module.tables) {
    const std::size_t pieces = table.pieces();
    for (std::size_t j = 0; j < table.knots.size(); ++j) table.knots[j] = static_cast<double>(j);
    for (auto& column : table.c) column.assign(pieces, 0.0);
  }
  return module;
}

}  // namespace tarn::ir
