#include "lang/syntax/docs.h"

#include <algorithm>
#include <string_view>

namespace tarn {
namespace {

struct Target {
  Span span;
  std::string* doc = nullptr;
};

class Targets {
 public:
  explicit Targets(const SourceFile& file) : file_(file) {}

  void add(Span span, std::string& doc) { list.push_back({span, &doc}); }
  void add_args(std::vector<ast::Arg>& args, Span owner) {
    for (ast::Arg& arg : args) {
      if (line(arg.span) != line(owner)) add(arg.span, arg.doc);
    }
  }
  template <class Entries>
  void add_lets(Entries& entries) {
    for (auto& entry : entries) {
      if (auto* let = std::get_if<ast::Let>(&entry)) add(let->span, let->doc);
    }
  }
  template <class Block>
  void add_block(Block& block) {
    add(block.span, block.doc);
    add_args(block.args, block.span);
    add_lets(block.entries);
  }

  void operator()(ast::UseItem& item) { add(item.span, item.doc); }
  void operator()(ast::Parameter& item) { add(item.span, item.arg.doc); }
  void operator()(ast::Let& item) { add(item.span, item.doc); }
  void operator()(ast::Law& item) {
    add(item.span, item.doc);
    add_args(item.args, item.span);
  }
  void operator()(ast::Bath& item) { add_block(item); }
  void operator()(ast::Kind& item) { add_block(item); }
  void operator()(ast::Chip& item) { add_block(item); }
  void operator()(ast::Experiment& item) {
    add(item.span, item.doc);
    add_lets(item.statements);
    for (ast::Statement& statement : item.statements) {
      if (auto* observe = std::get_if<ast::Observe>(&statement)) add(observe->span, observe->doc);
    }
  }

  std::vector<Target> list;

 private:
  std::uint32_t line(Span span) const { return line_of(file_, span.begin); }
  const SourceFile& file_;
};

std::vector<Target>::const_iterator begins_from(const std::vector<Target>& targets, std::uint32_t offset) {
  return std::lower_bound(targets.begin(), targets.end(), offset,
                          [](const Target& target, std::uint32_t from) { return target.span.begin < from; });
}

/// On the comment's line the declaration that ends last before it, unless one begun
/// later on the line is still open; else the last begun.
const Target* on_line(const std::vector<Target>& targets, std::uint32_t line_start, Span comment) {
  const Target* ended = nullptr;
  const Target* open = nullptr;
  for (auto target = begins_from(targets, line_start); target != targets.end(); ++target) {
    if (target->span.begin >= comment.begin) break;
    if (target->span.end > comment.begin) open = &*target;
    if (target->span.end <= comment.begin && (ended == nullptr || target->span.end > ended->span.end)) ended = &*target;
  }
  if (ended == nullptr) return open;
  return open != nullptr && open->span.begin > ended->span.begin ? open : ended;
}

const Target* next_after(const std::vector<Target>& targets, Span comment) {
  const auto found = begins_from(targets, comment.end);
  return found == targets.end() ? nullptr : &*found;
}

std::string_view words_of(std::string_view comment) {
  comment.remove_prefix(std::min(comment.find_first_not_of('#'), comment.size()));
  comment.remove_prefix(std::min(comment.find_first_not_of(" \t"), comment.size()));
  return comment.substr(0, comment.find_last_not_of(" \t") + 1);
}

std::vector<Target> sorted_targets(Ast& ast, const SourceFile& file) {
  Targets targets(file);
  for (ast::Item& item : ast.items) std::visit(targets, item);
  std::sort(targets.list.begin(), targets.list.end(), [](const Target& a, const Target& b) {
    return a.span.begin != b.span.begin ? a.span.begin < b.span.begin : a.span.end > b.span.end;
  });
  return std::move(targets.list);
}

/// As many as there are comments; null for those that document nothing.
std::vector<const Target*> targets_of_comments(const Ast& ast, const std::vector<Target>& targets,
                                               const SourceFile& file) {
  std::vector<const Target*> result;
  for (const ast::Comment& comment : ast.comments) {
    const Target* target = nullptr;
    if (comment.doc) target = on_line(targets, file.line_starts[line_of(file, comment.span.begin) - 1], comment.span);
    if (comment.doc && target == nullptr) target = next_after(targets, comment.span);
    result.push_back(target);
  }
  return result;
}

}  // namespace

std::vector<std::optional<Span>> documented(Ast& ast, const SourceFile& file) {
  std::vector<std::optional<Span>> result;
  const std::vector<Target> targets = sorted_targets(ast, file);
  for (const Target* target : targets_of_comments(ast, targets, file)) {
    result.push_back(target == nullptr ? std::nullopt : std::optional(target->span));
  }
  return result;
}

void attach_docs(Ast& ast, const SourceFile& file) {
  const bool any = std::any_of(ast.comments.begin(), ast.comments.end(), [](const auto& c) { return c.doc; });
  if (!any) return;
  const std::vector<Target> targets = sorted_targets(ast, file);
  const std::vector<const Target*> owners = targets_of_comments(ast, targets, file);
  for (std::size_t i = 0; i < owners.size(); ++i) {
    if (owners[i] == nullptr) continue;
    const Span comment = ast.comments[i].span;
    if (!owners[i]->doc->empty()) *owners[i]->doc += '\n';
    *owners[i]->doc += words_of(std::string_view(file.text).substr(comment.begin, comment.end - comment.begin));
  }
}

}  // namespace tarn
