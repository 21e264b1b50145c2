#include "lang/check/remedies.h"

#include <algorithm>
#include <charconv>

#include "lang/support/near.h"

namespace tarn {
namespace {

bool is_plain_number(std::string_view text) {
  double value = 0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  return error == std::errc() && end == text.data() + text.size();
}

bool is_name(std::string_view text) {
  return !text.empty() && std::none_of(text.begin(), text.end(), [](char c) {
    return std::string_view(" \t\r\n()[]{}+-*/^.,|<>=!\"").find(c) != std::string_view::npos;
  });
}

/// A quantity as it is written, `15 mK`. Never with the number at hand: its unit is not known, and
/// any that is put to it here could be wrong by powers of ten.
std::string example_of(Dimension dimension) {
  if (dimension == kTime) return "100 ns";
  if (dimension == kFrequency || dimension == kEnergy) return "5 GHz";
  if (dimension == kTemperature) return "15 mK";
  const std::string unit = default_unit(dimension).text;
  return fmt::format(fmt::runtime(unit.find_first_of("*/^") == std::string::npos ? "1 {}" : "1 [{}]"), unit);
}

/// `4e-4 GHz` where a plain number is wanted; empty for other texts.
std::string bare_remedy(std::string_view text) {
  const std::size_t blank = text.find(' ');
  if (blank == std::string_view::npos || !is_plain_number(text.substr(0, blank))) return {};
  if (text.find_first_of("*/+-^(", blank) != std::string_view::npos) return {};
  return fmt::format("a plain number has no unit: `{}`", text.substr(0, blank));
}

/// `2 s`, which is seconds, where 2*s may be meant; empty for other texts.
std::string time_place_remedy(std::string_view text) {
  if (!text.ends_with('s')) return {};
  text.remove_suffix(1);
  while (text.ends_with(' ')) text.remove_suffix(1);
  return is_plain_number(text) ? fmt::format("for the place along the anneal write `{}*s`", text) : std::string();
}

/// `frequency`, `[1/ns^0.5]`
std::string type_text(Dimension dimension) {
  const std::string phrase = describe(dimension);
  const std::string word = phrase.substr(phrase.find(' ') + 1);
  return named_dimension(word) ? word : fmt::format("[{}]", unit_product(dimension));
}

void collect_factors(const Ast& ast, ast::ExprId id, bool divides, std::vector<Factor>& factors) {
  while (true) {
    if (const auto* unary = std::get_if<ast::Unary>(&ast.expr(id).node)) {
      id = unary->operand;
      continue;
    }
    const auto* binary = std::get_if<ast::Binary>(&ast.expr(id).node);
    const bool divided = binary != nullptr && binary->op == ast::BinaryOp::divide;
    if (!divided && (binary == nullptr || binary->op != ast::BinaryOp::multiply)) break;
    collect_factors(ast, binary->right, divides != divided, factors);
    id = binary->left;
  }
  factors.push_back({id, divides});
}

}  // namespace

std::vector<Factor> factors_of(const Ast& ast, ast::ExprId product) {
  std::vector<Factor> factors;
  collect_factors(ast, product, false, factors);
  std::reverse(factors.begin(), factors.end());
  return factors;
}

std::string unit_remedy(const Session& session, Span span, Dimension expected) {
  const std::string_view text = session.text(span);
  const std::string example = example_of(expected);
  if (is_plain_number(text)) return fmt::format("a unit is missing: write it after the number, as in `{}`", example);
  if (!is_name(text)) return {};
  for (const ProgramParameter& parameter : session.program.parameters) {
    if (parameter.declared != text || !parameter.dimension.is_number()) continue;
    if (!parameter.value) return fmt::format("declare it with a unit: `parameter {} : {}`", text, type_text(expected));
    return fmt::format("a unit is missing where `{}` is declared: write it after the number, as in `{}`", text, example);
  }
  return {};
}

Span first_factor(const Session& session, Span span) {
  std::string_view text = session.text(span);
  while (text.starts_with('-') || text.starts_with(' ')) {
    text.remove_prefix(1);
    ++span.begin;
  }
  std::size_t end = std::min(text.find_first_of("*/(["), text.size());
  while (end > 0 && text[end - 1] == ' ') --end;
  return {span.file, span.begin, span.begin + static_cast<std::uint32_t>(end)};
}

std::string factor_remedy(Dimension expected, Dimension found) {
  struct Missing {
    Dimension dimension;
    const char* text;
  };
  const Dimension boltzmann = kEnergy / kTemperature;
  const Dimension planck = kEnergy * kTime / kAngle;
  const Missing known[] = {
      {boltzmann, "multiply by `kB`"},
      {kNumber / boltzmann, "divide by `kB`"},
      {planck, "multiply by `hbar`"},
      {kNumber / planck, "divide by `hbar`"},
      {boltzmann / planck, "multiply by `kB/hbar`"},
      {planck / boltzmann, "multiply by `hbar/kB`"},
      {kAngle, "multiply by `1 rad`"},
      {kNumber / kAngle, "divide by `1 rad`"},
      {kFlux, "multiply by a lever, a flux"},
      {kCurrent, "multiply by a lever, a current"},
      {kCharge, "multiply by a lever, a charge"},
      {kVoltage, "multiply by a lever, a voltage"},
      {kFlux / planck, "multiply by a lever, a flux: the product is an energy"},
      {kCurrent / planck, "multiply by a lever, a current: the product is an energy"},
      {kCharge / planck, "multiply by a lever, a charge: the product is an energy"},
      {kVoltage / planck, "multiply by a lever, a voltage: the product is an energy"},
  };
  const Dimension missing = expected / found;
  for (const Missing& factor : known) {
    if (factor.dimension == missing && !found.is_number()) return factor.text;
  }
  if (!missing.valid()) return {};
  // Of a product nobody would know where it should come from.
  const std::string unit = unit_product(missing);
  return unit.find_first_of("*/^") == std::string::npos ? fmt::format("a factor in {} is missing", unit) : std::string();
}

std::string dimension_remedy(const Session& session, Span span, Dimension expected, Dimension found) {
  std::string text;
  if (found.is_number()) text = unit_remedy(session, span, expected);
  if (found == kTime) text = time_place_remedy(session.text(span));
  if (expected.is_number() && text.empty()) text = bare_remedy(session.text(span));
  return text.empty() ? factor_remedy(expected, found) : text;
}

std::string dimension_remedy(const Session& session, const Scope& scope, ast::ExprId id, Dimension expected, Dimension found) {
  const Ast& ast = session.ast(scope);
  const auto is_sum = [&](const ast::Binary* b) { return b != nullptr && (b->op == ast::BinaryOp::add || b->op == ast::BinaryOp::subtract); };
  while (is_sum(std::get_if<ast::Binary>(&ast.expr(id).node))) id = std::get<ast::Binary>(ast.expr(id).node).left;
  std::string remedy;
  for (const Factor& factor : factors_of(ast, id)) {
    if (factor.divides || !found.is_number()) continue;
    std::string unit = unit_remedy(session, ast.expr(factor.id).span, expected);
    // Of 2*d it is d that has a unit.
    if (remedy.empty() || std::holds_alternative<ast::Use>(ast.expr(factor.id).node)) {
      if (!unit.empty()) remedy = std::move(unit);
    }
  }
  return remedy.empty() ? factor_remedy(expected, found) : remedy;
}

Shown written_unit(const Ast& ast, ast::ExprId id, Dimension dimension) {
  const ast::ExprNode* node = &ast.expr(id).node;
  while (const auto* unary = std::get_if<ast::Unary>(node)) node = &ast.expr(unary->operand).node;
  const auto* number = std::get_if<ast::Number>(node);
  const bool fits = number != nullptr && number->unit && number->unit->unit.dimension == dimension;
  if (fits) return {number->unit->text, number->unit->unit.factor};
  const NamedUnit usual = default_unit(dimension);
  return {usual.text, usual.unit.factor};
}

std::string in_unit(double value, const Shown& unit) {
  if (unit.label.empty()) return fmt::format("{:.6g}", value / unit.factor);
  const bool product = unit.label.find_first_of("*/^") != std::string::npos;
  return fmt::format(fmt::runtime(product ? "{:.6g} [{}]" : "{:.6g} {}"), value / unit.factor, unit.label);
}

std::string near_and(std::string_view word, std::span<const std::string_view> words, std::string_view available) {
  const std::string_view near = near_word(word, words);
  if (near.empty()) return std::string(available);
  const bool there = available.find(near) != std::string_view::npos;
  return fmt::format("did you mean `{}`?{}{}", near, there ? " " : " it is not available yet; ", available);
}

std::string in_list(const std::vector<std::string>& words) {
  constexpr std::size_t kMost = 12;
  std::string result;
  for (std::size_t k = 0; k < std::min(words.size(), kMost); ++k) result += (k > 0 ? ", `" : "`") + words[k] + "`";
  return words.size() > kMost ? result + ", ..." : result;
}

std::string offer(std::string_view word, const std::vector<std::string>& known, std::string_view what) {
  const std::string_view near = near_word(word, known);
  if (!near.empty()) return fmt::format("did you mean `{}`?", near);
  return known.empty() ? "" : fmt::format("{} {}", what, in_list(known));
}

std::string letters_remedy(std::string_view form, std::string_view bits, std::size_t qubits) {
  if (bits.size() == qubits) return fmt::format("`{}`", fmt::format(fmt::runtime(form), bits));
  const std::string example = fmt::format(fmt::runtime(form), std::string(qubits, '0'));
  return fmt::format("a state has a letter for each qubit, {} here: `{}`", counted(qubits, "letter"), example);
}

std::string counted(std::size_t count, std::string_view noun) { return fmt::format("{} {}{}", count, noun, count == 1 ? "" : "s"); }

std::string index_range(std::int64_t count) { return fmt::format("`0 .. {}`", count - 1); }

}  // namespace tarn
