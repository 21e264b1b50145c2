#pragma once
/// \file From recognised nodes to the tree: what the two halves of the builder share.

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "lang/syntax/nodes.h"

namespace tarn {

/// A node seen from its parent.
struct SyntaxNodeId {
  std::uint32_t row = 0;
};

class Builder {
 public:
  Builder(const SourceFile& file, const Tokens& tokens, const std::vector<SyntaxNode>& nodes, Diagnostics& diagnostics)
      : file_(file), tokens_(tokens), nodes_(nodes), diagnostics_(diagnostics) {
    ast_.file = file.id;
  }

  // ---- Reading nodes ----
  const SyntaxNode& node(SyntaxNodeId id) const { return nodes_[id.row]; }
  std::vector<SyntaxNodeId> children(SyntaxNodeId id) const;
  std::optional<SyntaxNodeId> child(SyntaxNodeId id, Tag tag) const;
  Span span(SyntaxNodeId id) const { return span_of(node(id).begin, node(id).end); }
  Span token_span(std::uint32_t token) const { return span_of(token, token + 1); }
  Code first_code(SyntaxNodeId id) const { return tokens_.code(node(id).begin); }
  std::string_view text(Span span) const {
    return std::string_view(file_.text).substr(span.begin, span.end - span.begin);
  }

  // ---- Expressions (build_expression.cpp) ----
  ast::ExprId expression(SyntaxNodeId id);
  ast::Name name(SyntaxNodeId id) const;
  ast::Text quoted(SyntaxNodeId id);
  ast::Path path(SyntaxNodeId id);
  ast::Range range(SyntaxNodeId id);
  /// Nothing if the unit is none; that was reported.
  std::optional<ast::UnitText> unit(SyntaxNodeId id);

  // ---- Declarations and statements ----
  void item(SyntaxNodeId id);

  Ast take() { return std::move(ast_); }

 private:
  Span span_of(std::uint32_t begin, std::uint32_t end) const;
  ast::ExprId add(Span span, ast::ExprNode node, unsigned height);
  unsigned height(ast::ExprId id) const { return heights_[id.row]; }

  ast::ExprId number(SyntaxNodeId id);
  std::optional<double> number_value(Span span);
  ast::ExprId ketbra(SyntaxNodeId id);
  ast::ExprId use(SyntaxNodeId id);
  ast::ExprId fold_left(SyntaxNodeId id);
  ast::ExprId binary(ast::BinaryOp op, ast::ExprId left, ast::ExprId right);
  ast::ExprId signed_value(SyntaxNodeId id);
  ast::ExprId choice(SyntaxNodeId id);
  ast::ExprId parenthesised(SyntaxNodeId id);
  void warn_divided_unit(ast::ExprId left, ast::ExprId right);
  void report_unit(SyntaxNodeId bracket, const UnitError& error);
  Span part_of_unit(SyntaxNodeId bracket, std::size_t begin, std::size_t end) const;
  unsigned height_of(const ast::Path& path) const;
  ast::Given given(SyntaxNodeId id);

  std::optional<ast::ExprId> child_value(SyntaxNodeId id, Tag tag);
  std::optional<ast::TypeText> type(SyntaxNodeId id);
  ast::Arg arg(SyntaxNodeId id);
  std::vector<ast::Arg> args(SyntaxNodeId id);
  ast::UseItem use_item(SyntaxNodeId id);
  ast::Let let(SyntaxNodeId id);
  ast::Law law(SyntaxNodeId id);
  ast::Bath bath(SyntaxNodeId id);
  ast::BathValue bath_value(SyntaxNodeId id);
  ast::Kind kind(SyntaxNodeId id);
  ast::Chip chip(SyntaxNodeId id);
  ast::Loop loop(SyntaxNodeId id);
  std::vector<ast::Loop> loops(SyntaxNodeId id);
  ast::EnergyTerm energy(SyntaxNodeId id);
  ast::JumpTerm jump(SyntaxNodeId id);
  ast::NoiseTerm noise(SyntaxNodeId id);
  ast::QubitPlace qubit_place(SyntaxNodeId id);
  ast::ChipPlace chip_place(SyntaxNodeId id);
  ast::CouplerPlace coupler_place(SyntaxNodeId id);

  ast::Experiment experiment(SyntaxNodeId id);
  ast::Statement statement(SyntaxNodeId id);
  ast::Pace pace(SyntaxNodeId id);
  ast::Piece piece(SyntaxNodeId id);
  ast::Equation equation(SyntaxNodeId id);
  ast::EquationChoice equation_choice(SyntaxNodeId id);
  ast::Levels levels(SyntaxNodeId id);
  ast::Draws draws(SyntaxNodeId id);
  ast::AtPoint at_point(SyntaxNodeId id);
  ast::Observe observe(SyntaxNodeId id);
  ast::Sweep sweep(SyntaxNodeId id);
  ast::Fit fit(SyntaxNodeId id);

  const SourceFile& file_;
  const Tokens& tokens_;
  const std::vector<SyntaxNode>& nodes_;
  Diagnostics& diagnostics_;
  Ast ast_;
  std::vector<unsigned> heights_;  ///< Of each expression; a leaf has 1.
};

/// Ids of the nodes that are no part of another, in the order of the text.
std::vector<SyntaxNodeId> roots(const std::vector<SyntaxNode>& nodes);

}  // namespace tarn
