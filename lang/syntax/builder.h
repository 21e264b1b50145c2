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
struct NodeId {
  std::uint32_t row = 0;
};

class Builder {
 public:
  Builder(const SourceFile& file, const Tokens& tokens, const std::vector<Node>& nodes, Diagnostics& diagnostics)
      : file_(file), tokens_(tokens), nodes_(nodes), diagnostics_(diagnostics) {
    ast_.file = file.id;
  }

  // ---- Reading nodes ----
  const Node& node(NodeId id) const { return nodes_[id.row]; }
  std::vector<NodeId> children(NodeId id) const;
  std::optional<NodeId> child(NodeId id, Tag tag) const;
  Span span(NodeId id) const { return span_of(node(id).begin, node(id).end); }
  Span token_span(std::uint32_t token) const { return span_of(token, token + 1); }
  Code first_code(NodeId id) const { return tokens_.code(node(id).begin); }
  std::string_view text(Span span) const {
    return std::string_view(file_.text).substr(span.begin, span.end - span.begin);
  }

  // ---- Expressions (build_expression.cpp) ----
  ast::ExprId expression(NodeId id);
  ast::Name name(NodeId id) const;
  ast::Text quoted(NodeId id);
  ast::Path path(NodeId id);
  ast::Range range(NodeId id);
  /// Nothing if the unit is none; that was reported.
  std::optional<ast::UnitText> unit(NodeId id);

  // ---- Declarations and statements ----
  void item(NodeId id);

  Ast take() { return std::move(ast_); }

 private:
  Span span_of(std::uint32_t begin, std::uint32_t end) const;
  ast::ExprId add(Span span, ast::ExprNode node, unsigned height);
  unsigned height(ast::ExprId id) const { return heights_[id.row]; }

  ast::ExprId number(NodeId id);
  std::optional<double> number_value(Span span);
  ast::ExprId ketbra(NodeId id);
  ast::ExprId use(NodeId id);
  ast::ExprId fold_left(NodeId id);
  ast::ExprId binary(ast::BinaryOp op, ast::ExprId left, ast::ExprId right);
  ast::ExprId signed_value(NodeId id);
  ast::ExprId choice(NodeId id);
  ast::ExprId parenthesised(NodeId id);
  void warn_divided_unit(ast::ExprId left, ast::ExprId right);
  void report_unit(NodeId bracket, const UnitError& error);
  Span part_of_unit(NodeId bracket, std::size_t begin, std::size_t end) const;
  unsigned height_of(const ast::Path& path) const;
  ast::Given given(NodeId id);

  std::optional<ast::ExprId> child_value(NodeId id, Tag tag);
  std::optional<ast::TypeText> type(NodeId id);
  ast::Arg arg(NodeId id);
  std::vector<ast::Arg> args(NodeId id);
  ast::UseItem use_item(NodeId id);
  ast::Let let(NodeId id);
  ast::Law law(NodeId id);
  ast::Bath bath(NodeId id);
  ast::BathValue bath_value(NodeId id);
  ast::Kind kind(NodeId id);
  ast::Chip chip(NodeId id);
  ast::Loop loop(NodeId id);
  std::vector<ast::Loop> loops(NodeId id);
  ast::EnergyTerm energy(NodeId id);
  ast::JumpTerm jump(NodeId id);
  ast::NoiseTerm noise(NodeId id);
  ast::QubitPlace qubit_place(NodeId id);
  ast::ChipPlace chip_place(NodeId id);
  ast::CouplerPlace coupler_place(NodeId id);

  ast::Experiment experiment(NodeId id);
  ast::Statement statement(NodeId id);
  ast::Pace pace(NodeId id);
  ast::Piece piece(NodeId id);
  ast::Equation equation(NodeId id);
  ast::EquationChoice equation_choice(NodeId id);
  ast::Levels levels(NodeId id);
  ast::Draws draws(NodeId id);
  ast::AtPoint at_point(NodeId id);
  ast::Observe observe(NodeId id);
  ast::Sweep sweep(NodeId id);
  ast::Fit fit(NodeId id);

  const SourceFile& file_;
  const Tokens& tokens_;
  const std::vector<Node>& nodes_;
  Diagnostics& diagnostics_;
  Ast ast_;
  std::vector<unsigned> heights_;  ///< Of each expression; a leaf has 1.
};

/// Ids of the nodes that are no part of another, in the order of the text.
std::vector<NodeId> roots(const std::vector<Node>& nodes);

}  // namespace tarn
