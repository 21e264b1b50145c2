#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

#include "lang/quantities/constants.h"
#include "lang/support/check.h"
#include "lang/syntax/builder.h"
#include "lang/syntax/characters.h"

namespace tarn {
namespace {

/// Deepest tree that later phases are asked to walk.
constexpr unsigned kMaxHeight = kMaxChain;

struct OperatorCode {
  Code code;
  ast::BinaryOp op;
};
constexpr auto kOperators = std::to_array<OperatorCode>({
    {Code::plus, ast::BinaryOp::add},
    {Code::minus, ast::BinaryOp::subtract},
    {Code::times, ast::BinaryOp::multiply},
    {Code::over_sign, ast::BinaryOp::divide},
    {Code::caret, ast::BinaryOp::power},
    {Code::less_equal, ast::BinaryOp::less_equal},
    {Code::greater_equal, ast::BinaryOp::greater_equal},
    {Code::equal, ast::BinaryOp::equal},
    {Code::not_equal, ast::BinaryOp::not_equal},
    {Code::less, ast::BinaryOp::less},
    {Code::greater, ast::BinaryOp::greater},
    {Code::and_, ast::BinaryOp::logical_and},
    {Code::or_, ast::BinaryOp::logical_or},
});

ast::BinaryOp binary_op(Code code) {
  for (const OperatorCode& row : kOperators) {
    if (row.code == code) return row.op;
  }
  throw InternalError("no binary operator");
}

/// The micro sign looks like the Greek letter; names are compared by the letter.
std::string with_greek_mu(std::string_view text) {
  std::string result(text);
  for (auto at = result.find("\xC2\xB5"); at != std::string::npos; at = result.find("\xC2\xB5", at)) {
    result.replace(at, 2, "\xCE\xBC");
  }
  return result;
}

}  // namespace

std::vector<SyntaxNodeId> roots(const std::vector<SyntaxNode>& nodes) {
  std::vector<SyntaxNodeId> result;
  for (auto end = nodes.size(); end > 0; end -= nodes[end - 1].size) {
    result.push_back({static_cast<std::uint32_t>(end - 1)});
  }
  std::reverse(result.begin(), result.end());
  return result;
}

std::vector<SyntaxNodeId> Builder::children(SyntaxNodeId id) const {
  std::vector<SyntaxNodeId> result;
  const std::uint32_t first = id.row + 1 - node(id).size;
  for (std::uint32_t end = id.row; end > first; end -= nodes_[end - 1].size) result.push_back({end - 1});
  std::reverse(result.begin(), result.end());
  return result;
}

std::optional<SyntaxNodeId> Builder::child(SyntaxNodeId id, Tag tag) const {
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == tag) return c;
  }
  return std::nullopt;
}

Span Builder::span_of(std::uint32_t begin, std::uint32_t end) const {
  TARN_CHECK(begin < end && end <= tokens_.size());
  return {file_.id, tokens_.places[begin].begin, tokens_.places[end - 1].end};
}

ast::ExprId Builder::add(Span span, ast::ExprNode content, unsigned height) {
  if (height > kMaxHeight) {
    diagnostics_.report({span.file, span.begin, span.begin + 1}, diag::expression_too_long, kMaxHeight)
        .remedy("name parts of it with `let`");
    content = ast::ErrorExpr{};
    height = 1;
  }
  const ast::ExprId id{static_cast<std::uint32_t>(ast_.exprs.size())};
  ast_.exprs.push_back({span, false, std::move(content)});
  heights_.push_back(height);
  return id;
}

ast::ExprId Builder::expression(SyntaxNodeId id) {
  const Tag tag = node(id).tag;
  if (tag == Tag::number) return number(id);
  if (tag == Tag::text) return add(span(id), quoted(id), 1);
  if (tag == Tag::ketbra) return ketbra(id);
  if (tag == Tag::paren) return parenthesised(id);
  if (tag == Tag::use) return use(id);
  if (tag == Tag::sign || tag == Tag::negation) return signed_value(id);
  if (tag == Tag::choice_expr) return choice(id);
  return fold_left(id);
}

ast::Name Builder::name(SyntaxNodeId id) const {
  return {span(id), with_greek_mu(text(span(id)))};
}

std::optional<double> Builder::number_value(Span place) {
  const std::string_view digits = text(place);
  if (digits == "pi") return kPi;
  double value = 0;
  const auto [end, error] = std::from_chars(digits.data(), digits.data() + digits.size(), value);
  if (error == std::errc() && end == digits.data() + digits.size()) return value;
  diagnostics_.report(place, diag::number_range, digits);
  return std::nullopt;
}

ast::ExprId Builder::number(SyntaxNodeId id) {
  const Span digits = token_span(node(id).begin);
  const std::optional<double> value = number_value(digits);
  std::optional<ast::UnitText> in_unit;
  bool bad = !value;
  for (const SyntaxNodeId c : children(id)) {
    in_unit = unit(c);
    bad = bad || !in_unit;
  }
  if (!bad && in_unit && !std::isfinite(*value * in_unit->unit.factor)) {
    diagnostics_.report(span(id), diag::number_range, text(span(id)));
    bad = true;
  }
  if (bad) return add(span(id), ast::ErrorExpr{}, 1);
  return add(span(id), ast::Number{*value, std::string(text(digits)), std::move(in_unit)}, 1);
}

std::optional<ast::UnitText> Builder::unit(SyntaxNodeId id) {
  const Span place = span(id);
  if (node(id).tag == Tag::unit) {
    const std::string_view word = text(place);
    const std::optional<Unit> known = find_unit(word);
    TARN_CHECK(known.has_value());
    return ast::UnitText{place, std::string(word), false, *known};
  }
  // Token by token, so that spaces and comments between them do not matter.
  std::string product;
  for (std::uint32_t t = node(id).begin + 1; t + 1 < node(id).end; ++t) product += text(token_span(t));
  const auto parsed = parse_unit(product);
  if (!parsed) {
    report_unit(id, parsed.error());
    return std::nullopt;
  }
  return ast::UnitText{place, product, true, *parsed};
}

/// The tokens of the bracket that hold the bytes `begin` .. `end` of its joined text.
Span Builder::part_of_unit(SyntaxNodeId bracket, std::size_t begin, std::size_t end) const {
  std::optional<Span> part;
  std::size_t at = 0;
  for (std::uint32_t t = node(bracket).begin + 1; t + 1 < node(bracket).end; ++t) {
    const Span token = token_span(t);
    if (at < end && at + (token.end - token.begin) > begin) part = part ? cover(*part, token) : token;
    at += token.end - token.begin;
  }
  return part ? *part : span(bracket);
}

void Builder::report_unit(SyntaxNodeId bracket, const UnitError& error) {
  const Span place = part_of_unit(bracket, error.begin, error.end);
  switch (error.reason) {
    case UnitError::Reason::bad_exponent:
      diagnostics_.report(place, diag::unit_exponent, error.found).remedy("an exponent is a number such as `2` or `0.5`");
      break;
    case UnitError::Reason::too_large:
      diagnostics_.report(place, diag::number_range, error.found);
      break;
    case UnitError::Reason::empty:
    case UnitError::Reason::not_a_product:
    case UnitError::Reason::unknown_unit: {
      auto tail = diagnostics_.report(place, diag::unknown_unit, error.found);
      if (!error.near.empty()) tail.remedy("did you mean `" + error.near + "`?");
      break;
    }
  }
}

ast::Text Builder::quoted(SyntaxNodeId id) {
  const Span place = span(id);
  std::string_view content = text(place).substr(1);
  if (content.ends_with('"')) content.remove_suffix(1);
  const auto offset = [&](std::size_t i) { return place.begin + 1 + static_cast<std::uint32_t>(i); };
  ast::Text result{place, {""}, {}};
  std::size_t at = 0;
  while (at < content.size()) {
    const auto brace = std::min(content.find_first_of("{}", at), content.size());
    result.literals.back() += content.substr(at, brace - at);
    if (brace == content.size()) break;
    std::size_t stop = brace + 1;
    while (stop < content.size() && (is_digit(content[stop]) || letter_length(content.substr(stop)) > 0)) {
      stop += character_length(content.substr(stop));
    }
    const std::string_view word = content.substr(brace + 1, stop - brace - 1);
    const bool closed = stop < content.size() && content[stop] == '}';
    if (content[brace] == '}' || word.empty() || is_digit(word.front()) || !closed) {
      diagnostics_.report({place.file, offset(brace), offset(brace) + 1}, diag::text_insert);
      break;
    }
    result.inserts.push_back({{place.file, offset(brace + 1), offset(stop)}, with_greek_mu(word)});
    result.literals.emplace_back();
    at = stop + 1;
  }
  return result;
}

ast::ExprId Builder::ketbra(SyntaxNodeId id) {
  const Span place = token_span(node(id).begin);
  const std::string_view token = text(place);
  const auto middle = token.find('>');
  ast::Ketbra result{std::string(token.substr(1, middle - 1)),
                     std::string(token.substr(middle + 2, token.size() - middle - 3)), {}};
  unsigned tallest = 0;
  for (const SyntaxNodeId c : children(id)) {
    result.places.push_back(path(c));
    tallest = std::max(tallest, height_of(result.places.back()));
  }
  if (result.ket.size() != result.bra.size()) {
    diagnostics_.report(place, diag::unequal_ketbra, token, result.ket.size(), result.bra.size());
    return add(span(id), ast::ErrorExpr{}, 1);
  }
  return add(span(id), std::move(result), tallest + 1);
}

ast::Given Builder::given(SyntaxNodeId id) {
  ast::Given result{span(id), std::nullopt, {}};
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::given_name) {
      result.name = name(c);
    } else {
      result.value = expression(c);
    }
  }
  return result;
}

ast::Path Builder::path(SyntaxNodeId id) {
  ast::Path result{span(id), {}, false, {}};
  for (const SyntaxNodeId c : children(id)) {
    const std::vector<SyntaxNodeId> parts = children(c);
    if (node(c).tag == Tag::call) {
      result.call = true;
      for (const SyntaxNodeId g : parts) result.given.push_back(given(g));
    } else {
      ast::Step step{name(parts.front()), std::nullopt};
      if (parts.size() > 1) step.index = expression(parts.back());
      result.steps.push_back(std::move(step));
    }
  }
  return result;
}

unsigned Builder::height_of(const ast::Path& path) const {
  unsigned tallest = 0;
  for (const ast::Step& step : path.steps) {
    if (step.index) tallest = std::max(tallest, height(*step.index));
  }
  for (const ast::Given& given : path.given) tallest = std::max(tallest, height(given.value));
  return tallest;
}

ast::ExprId Builder::use(SyntaxNodeId id) {
  ast::Use result;
  for (const SyntaxNodeId c : children(id)) {
    if (node(c).tag == Tag::path) {
      result.path = path(c);
    } else if (node(c).tag == Tag::under) {
      result.under = name(children(c).front());
    } else {
      const std::vector<SyntaxNodeId> parts = children(c);
      result.held.push_back({span(c), path(parts.front()), quoted(parts.back())});
    }
  }
  unsigned tallest = height_of(result.path);
  for (const ast::Held& held : result.held) tallest = std::max(tallest, height_of(held.place));
  return add(span(id), std::move(result), tallest + 1);
}

ast::ExprId Builder::parenthesised(SyntaxNodeId id) {
  const ast::ExprId inner = expression(children(id).front());
  ast_.exprs[inner.row].parenthesised = true;
  ast_.exprs[inner.row].span = span(id);
  return inner;
}

ast::ExprId Builder::binary(ast::BinaryOp op, ast::ExprId left, ast::ExprId right) {
  if (op == ast::BinaryOp::divide) warn_divided_unit(left, right);
  const Span place = cover(ast_.expr(left).span, ast_.expr(right).span);
  return add(place, ast::Binary{op, left, right}, std::max(height(left), height(right)) + 1);
}

ast::ExprId Builder::fold_left(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  ast::ExprId result = expression(parts.front());
  for (std::size_t i = 1; i + 1 < parts.size(); i += 2) {
    const ast::BinaryOp op = binary_op(first_code(parts[i]));
    result = binary(op, result, expression(parts[i + 1]));
  }
  return result;
}

ast::ExprId Builder::signed_value(SyntaxNodeId id) {
  const bool negation = node(id).tag == Tag::negation;
  const ast::UnaryOp op = negation ? ast::UnaryOp::logical_not : ast::UnaryOp::negate;
  const ast::ExprId operand = expression(children(id).back());
  const ast::ExprId once = add(span(id), ast::Unary{op, operand}, height(operand) + 1);
  if (first_code(id) != Code::link) return once;
  return add(span(id), ast::Unary{op, once}, height(once) + 1);
}

ast::ExprId Builder::choice(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  const ast::ExprId condition = expression(parts[0]);
  const ast::ExprId yes = expression(parts[1]);
  const ast::ExprId no = expression(parts[2]);
  const unsigned tallest = std::max({height(condition), height(yes), height(no)});
  return add(span(id), ast::Choice{condition, yes, no}, tallest + 1);
}

void Builder::warn_divided_unit(ast::ExprId left, ast::ExprId right) {
  if (const auto* sign = std::get_if<ast::Unary>(&ast_.expr(left).node)) left = sign->operand;
  const ast::Expr& above = ast_.expr(left);
  const ast::Expr& below = ast_.expr(right);
  const auto* numerator = std::get_if<ast::Number>(&above.node);
  const auto* denominator = std::get_if<ast::Number>(&below.node);
  if (numerator == nullptr || denominator == nullptr || numerator->unit || !denominator->unit) return;
  if (above.parenthesised || below.parenthesised) return;
  const std::string n = numerator->text;
  const std::string d = std::string(text(below.span));
  const Span place = cover(above.span, below.span);
  diagnostics_.report(place, diag::divided_unit, text(place), n + "/(" + d + ")")
      .remedy("write `" + n + "/(" + d + ")`, or `(" + n + "/" + denominator->text + ")*1 " +
              std::string(text(denominator->unit->span)) + "` for the other");
}

ast::Range Builder::range(SyntaxNodeId id) {
  const std::vector<SyntaxNodeId> parts = children(id);
  const ast::ExprId low = expression(parts.front());
  return {span(id), low, expression(parts.back())};
}

}  // namespace tarn
