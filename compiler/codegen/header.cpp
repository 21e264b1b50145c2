#include "compiler/codegen/header.h"

#include <charconv>
#include <set>
#include <string_view>

namespace tarn::compiler {
namespace {

constexpr std::string_view kInterface =
#include "kernel_interface.inc"
    ;

bool is_plain(char c) { return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9'); }

/// A name as it may stand in a comment.
std::string quoted(std::string_view name) {
  std::string text;
  for (const char c : name) text += (c == '*' || c == '/' || static_cast<unsigned char>(c) < 0x20) ? '_' : c;
  return "\"" + text + "\"";
}

std::string number_text(double number) {
  char digits[40];
  const auto end = std::to_chars(digits, digits + sizeof digits, number).ptr;
  std::string text(digits, end);
  return text.find_first_of(".en") == std::string::npos ? text + ".0" : text;
}

class HeaderWriter {
 public:
  explicit HeaderWriter(const ir::Module& module) : module_(module) {}

  std::string write() {
    out_ = "/* The compiled model " + quoted(module_.name) + ". Link its object with `-lmvec -lm`, or load its\n" +
           "   shared object, and reach it through `tarn_kernel_table`. */\n\n";
    out_ += kInterface;
    out_ += "\n#ifndef TARN_MODEL_NAMES\n#define TARN_MODEL_NAMES\n\nextern const tarn_kernel tarn_kernel_table;\n";
    inputs();
    for (std::size_t set = 0; set < module_.sets.size(); ++set) rows(set);
    generators();
    tables();
    out_ += "\n#endif\n";
    return std::move(out_);
  }

 private:
  std::string identifier(const std::string& prefix, std::string_view name) {
    std::string made = prefix;
    for (const char c : name) made += is_plain(c) ? c : '_';
    std::string unique = made;
    for (int copy = 2; !used_.insert(unique).second; ++copy) unique = made + "_" + std::to_string(copy);
    return unique;
  }

  void begin(const std::string& what) { out_ += "\n/* " + what + " */\n"; }

  void enumerate(const std::string& prefix, const std::vector<std::string>& names) {
    if (names.empty()) return;
    out_ += "enum {\n";
    for (std::size_t k = 0; k < names.size(); ++k) {
      const std::string comma = k + 1 < names.size() ? "," : "";
      out_ += "  " + identifier(prefix, names[k]) + " = " + std::to_string(k) + comma + " /* " + quoted(names[k]) + " */\n";
    }
    out_ += "};\n";
  }

  void inputs() {
    begin("Inputs of a block: " + std::to_string(module_.inputs.size()));
    enumerate("tarn_input_", module_.inputs);
    std::vector<std::string> sets;
    for (const auto& set : module_.sets) sets.push_back(set.name);
    begin("Function sets");
    enumerate("tarn_set_", sets);
  }

  void rows(std::size_t set) {
    std::vector<std::string> names;
    for (const auto& function : module_.sets[set].functions) names.push_back(function.name);
    begin("Rows of set " + quoted(module_.sets[set].name));
    enumerate("tarn_row_" + std::to_string(set) + "_", names);
  }

  void generators() {
    std::vector<std::string> names;
    for (const auto& generator : module_.generators) names.push_back(generator.name);
    begin("Generators");
    enumerate("tarn_generator_", names);
  }

  void tables() {
    if (module_.tables.empty()) return;
    begin("Numbers of the tables: pass tarn_model_tables as the tables of a block");
    for (std::size_t k = 0; k < module_.tables.size(); ++k) table(k);
    out_ += "static const double* const tarn_model_tables[] = {";
    for (std::size_t k = 0; k < module_.tables.size(); ++k) out_ += (k > 0 ? ", " : "") + ("tarn_model_table_" + std::to_string(k));
    out_ += "};\n";
  }

  void table(std::size_t k) {
    const ir::Table& table = module_.tables[k];
    out_ += "/* " + quoted(table.name) + ", " + std::to_string(table.pieces()) + " pieces */\n";
    out_ += "static const double tarn_model_table_" + std::to_string(k) + "[] = {";
    std::vector<double> numbers = table.knots;
    for (const auto& column : table.c) numbers.insert(numbers.end(), column.begin(), column.end());
    for (std::size_t j = 0; j < numbers.size(); ++j) out_ += (j == 0 ? "\n  " : j % 6 == 0 ? ",\n  " : ", ") + number_text(numbers[j]);
    out_ += "};\n";
  }

  const ir::Module& module_;
  std::string out_;
  std::set<std::string> used_;
};

}  // namespace

std::string c_header(const ir::Module& module) { return HeaderWriter(module).write(); }

}  // namespace tarn::compiler
