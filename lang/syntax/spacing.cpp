#include "lang/syntax/spacing.h"

namespace tarn {
namespace {

bool opens(Code code) { return code == Code::open_round || code == Code::open_square; }
bool closes(Code code) { return code == Code::close_round || code == Code::close_square; }

/// Marks the operators of an index or loop bound, not those inside its brackets.
void mark_tight(const Tokens& tokens, const SyntaxNode& node, std::vector<bool>& tight) {
  for (std::uint32_t t = node.begin; t < node.end; ++t) {
    const Code code = tokens.code(t);
    if (code == Code::plus || code == Code::minus) tight[t] = true;
  }
}

void mark_loop(const Tokens& tokens, const SyntaxNode& loop, std::vector<bool>& tight) {
  SyntaxNode bounds = loop;
  while (bounds.begin < loop.end && tokens.code(bounds.begin) != Code::in) ++bounds.begin;
  bounds.end = bounds.begin;
  while (bounds.end < loop.end && tokens.code(bounds.end) != Code::where) ++bounds.end;
  mark_tight(tokens, bounds, tight);
}

}  // namespace

Roles roles_of(const Tokens& tokens, const std::vector<SyntaxNode>& nodes) {
  const std::size_t n = tokens.size();
  Roles roles{std::vector<bool>(n), std::vector<bool>(n), std::vector<bool>(n), std::vector<bool>(n)};
  for (const SyntaxNode& node : nodes) {
    if (node.tag == Tag::name || node.tag == Tag::ketbra) roles.name[node.begin] = true;
    if (node.tag == Tag::sign) roles.sign[node.begin] = true;
    if (node.tag == Tag::loop) mark_loop(tokens, node, roles.tight);
    if (node.tag == Tag::step && node.end > node.begin + 1) {
      mark_tight(tokens, {node.tag, node.begin + 2, node.end - 1, 0}, roles.tight);
    }
    if (node.tag == Tag::bracket) {
      for (std::uint32_t t = node.begin + 1; t < node.end; ++t) roles.unit[t] = true;
    }
  }
  return roles;
}

bool space_before(std::size_t i, const Tokens& tokens, const Roles& roles) {
  const Code before = tokens.code(i - 1);
  const Code code = tokens.code(i);
  if (roles.unit[i]) return false;
  if (roles.sign[i - 1]) return code == Code::minus || code == Code::link;
  if (opens(before) || closes(code) || code == Code::comma || before == Code::dot || code == Code::dot) return false;
  if (before == Code::open_curly && code == Code::close_curly) return false;
  if (opens(code) && roles.name[i - 1]) return false;
  if (code == Code::open_round && before == Code::correlation) return false;
  const auto is_tight = [&](std::size_t t) {
    const Code c = tokens.code(t);
    if (t > 0 && tokens.code(t - 1) == Code::spread) return false;
    return c == Code::times || c == Code::over_sign || c == Code::caret || (roles.tight[t] && !roles.sign[t]);
  };
  return !(is_tight(i) || is_tight(i - 1));
}

}  // namespace tarn
