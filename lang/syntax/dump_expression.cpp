#include <array>

#include "lang/syntax/dump.h"

namespace tarn {
namespace {

std::string_view symbol(ast::BinaryOp op) {
  constexpr std::array<std::string_view, 13> kSymbols{"+", "-", "*", "/", "^", "<=", ">=", "==", "!=", "<", ">", "and", "or"};
  return kSymbols[static_cast<std::size_t>(op)];
}

struct ExpressionText {
  const Ast& ast;

  std::string operator()(const ast::ErrorExpr&) const { return "(error)"; }
  std::string operator()(const ast::Number& number) const {
    if (!number.unit) return number.text;
    return number.text + (number.unit->bracket ? " [" + number.unit->text + "]" : " " + number.unit->text);
  }
  std::string operator()(const ast::Text& text) const { return dump(text); }
  std::string operator()(const ast::Ketbra& ketbra) const {
    std::string text = "|" + ketbra.ket + "><" + ketbra.bra + "|";
    for (std::size_t i = 0; i < ketbra.places.size(); ++i) text += (i == 0 ? "(" : ", ") + dump(ast, ketbra.places[i]);
    return ketbra.places.empty() ? text : text + ")";
  }
  std::string operator()(const ast::Use& use) const {
    std::string text = dump(ast, use.path);
    for (const ast::Held& held : use.held) {
      text = "(when " + text + " " + dump(ast, held.place) + " " + dump(held.state) + ")";
    }
    return use.under ? "(under " + text + " " + use.under->text + ")" : text;
  }
  std::string operator()(const ast::Unary& unary) const {
    return (unary.op == ast::UnaryOp::negate ? "(- " : "(not ") + dump(ast, unary.operand) + ")";
  }
  std::string operator()(const ast::Binary& binary) const {
    return "(" + std::string(symbol(binary.op)) + " " + dump(ast, binary.left) + " " + dump(ast, binary.right) + ")";
  }
  std::string operator()(const ast::Choice& choice) const {
    return "(if " + dump(ast, choice.condition) + " " + dump(ast, choice.yes) + " " + dump(ast, choice.no) + ")";
  }
};

}  // namespace

std::string dump(const ast::Text& text) {
  std::string result = "\"" + text.literals.front();
  for (std::size_t i = 0; i < text.inserts.size(); ++i) result += "{" + text.inserts[i].text + "}" + text.literals[i + 1];
  return result + "\"";
}

std::string dump(const Ast& ast, const ast::Path& path) {
  std::string text;
  for (const ast::Step& step : path.steps) {
    if (!text.empty()) text += ".";
    text += step.name.text;
    if (step.index) text += "[" + dump(ast, *step.index) + "]";
  }
  if (!path.call) return text;
  text += "(";
  for (std::size_t i = 0; i < path.given.size(); ++i) {
    if (i > 0) text += ", ";
    if (path.given[i].name) text += path.given[i].name->text + " = ";
    text += dump(ast, path.given[i].value);
  }
  return text + ")";
}

std::string dump(const Ast& ast, ast::ExprId id) { return std::visit(ExpressionText{ast}, ast.expr(id).node); }

}  // namespace tarn
