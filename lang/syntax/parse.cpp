#include "lang/syntax/parse.h"

#include <algorithm>

#include "lang/syntax/builder.h"
#include "lang/syntax/docs.h"
#include "lang/syntax/expectations.h"

namespace tarn {
namespace {

void report_all(const SourceFile& file, const Tokens& tokens, const Recognised& recognised, Diagnostics& diagnostics) {
  for (const Failure& failure : recognised.failures) {
    if (diagnostics.full()) return;
    report_failure(file, tokens, failure, diagnostics);
  }
  // A statement that was cut off by the end of the file says it better than its block.
  const bool cut_off = std::any_of(recognised.failures.begin(), recognised.failures.end(),
                                   [&](const Failure& failure) { return failure.token >= tokens.size(); });
  for (const OpenBlock& block : recognised.open_blocks) {
    if (!(cut_off && block.token >= tokens.size())) report_open_block(file, tokens, block, diagnostics);
  }
}

}  // namespace

Ast parse(const SourceFile& file, Diagnostics& diagnostics) {
  Tokens tokens = tokenize(file, diagnostics);
  if (!tokens.usable) return Ast{file.id, {}, {}, std::move(tokens.comments)};
  const Recognised recognised = recognise(tokens);
  report_all(file, tokens, recognised, diagnostics);
  Builder builder(file, tokens, recognised.nodes, diagnostics);
  for (const SyntaxNodeId root : roots(recognised.nodes)) builder.item(root);
  Ast ast = builder.take();
  ast.comments = std::move(tokens.comments);
  attach_docs(ast, file);
  return ast;
}

}  // namespace tarn
