#include "lang/syntax/tidy.h"

#include <algorithm>

#include "lang/support/check.h"
#include "lang/syntax/docs.h"
#include "lang/syntax/parse.h"
#include "lang/syntax/spacing.h"

namespace tarn {
namespace {

constexpr std::size_t kIndent = 4;

/// How a token begins: on the line of the one before, or on a line of its own.
enum class Break : unsigned char { none, continuation, statement };

struct Layout {
  std::vector<Break> breaks;
  std::vector<std::size_t> depth;  ///< Blocks around each token.
};

bool is_block_entry(Tag tag) {
  return (tag >= Tag::bath_value && tag <= Tag::noise) || (tag >= Tag::qubit_place && tag <= Tag::coupler_place) ||
         (tag >= Tag::chip_use && tag <= Tag::equation) || (tag >= Tag::levels && tag <= Tag::sweep) ||
         (tag >= Tag::data && tag <= Tag::fit) || tag == Tag::expect || tag == Tag::tolerance;
}

bool is_item(Tag tag) { return tag <= Tag::experiment; }

class Tidier {
 public:
  Tidier(const SourceFile& file, Ast& ast, const Tokens& tokens, const std::vector<SyntaxNode>& nodes)
      : file_(file), tokens_(tokens), comments_(ast.comments), roles_(roles_of(tokens, nodes)) {
    lay_out(nodes);
    place_comments(documented(ast, file));
  }

  std::string run() {
    std::size_t comment = 0;
    for (std::size_t t = 0; t <= tokens_.size(); ++t) {
      for (; comment < order_.size() && after_[order_[comment]] == t; ++comment) write_comment(order_[comment], t);
      if (t < tokens_.size()) write_token(t);
    }
    end_line();
    return std::move(out_);
  }

 private:
  // ---- Deciding on lines ----

  std::uint32_t line(std::uint32_t offset) const { return line_of(file_, offset); }
  std::uint32_t token_line(std::size_t t) const { return line(tokens_.places[t].begin); }

  void lay_out(const std::vector<SyntaxNode>& nodes) {
    const std::size_t n = tokens_.size();
    layout_.breaks.assign(n, Break::none);
    layout_.depth.assign(n + 1, 0);
    for (std::size_t t = 1; t < n; ++t) {
      if (token_line(t) > line(tokens_.places[t - 1].end)) layout_.breaks[t] = Break::continuation;
    }
    for (const SyntaxNode& node : nodes) {
      if (is_item(node.tag) || is_block_entry(node.tag)) layout_.breaks[node.begin] = Break::statement;
    }
    std::size_t depth = 0;
    for (std::size_t t = 0; t < n; ++t) {
      if (tokens_.code(t) == Code::close_curly) --depth;
      if (tokens_.code(t) == Code::close_curly) layout_.breaks[t] = Break::statement;
      layout_.depth[t] = depth;
      if (tokens_.code(t) == Code::open_curly) ++depth;
      if (tokens_.code(t) == Code::open_curly && layout_.breaks[t] != Break::none) layout_.breaks[t] = Break::statement;
    }
    for (const SyntaxNode& node : nodes) {
      if (is_item(node.tag) && fits_one_line(node)) join(node);
    }
  }

  /// A block written on one line, without comments, whose tidy line is not too wide.
  bool fits_one_line(const SyntaxNode& node) const {
    if (tokens_.code(node.end - 1) != Code::close_curly || token_line(node.begin) != token_line(node.end - 1)) return false;
    std::size_t width = 0;
    for (std::size_t t = node.begin; t < node.end; ++t) {
      if (t > node.begin && joined_space(t)) ++width;
      width += tokens_.places[t].end - tokens_.places[t].begin;
    }
    return width <= kTidyWidth;
  }
  void join(const SyntaxNode& node) {
    for (std::size_t t = node.begin + 1; t < node.end; ++t) {
      if (layout_.breaks[t] == Break::statement && starts_entry(t)) spaced_.resize(tokens_.size());
      if (layout_.breaks[t] == Break::statement && starts_entry(t)) spaced_[t] = true;
      layout_.breaks[t] = Break::none;
    }
  }
  bool starts_entry(std::size_t t) const {
    return tokens_.code(t) != Code::close_curly && tokens_.code(t - 1) != Code::open_curly;
  }
  bool joined_space(std::size_t t) const {
    return layout_.breaks[t] == Break::statement || space_before(t, tokens_, roles_);
  }

  // ---- Deciding on comments ----

  std::size_t token_after(std::uint32_t offset) const {
    const auto found = std::lower_bound(tokens_.places.begin(), tokens_.places.end(), offset,
                                        [](const Token& token, std::uint32_t from) { return token.begin < from; });
    return static_cast<std::size_t>(found - tokens_.places.begin());
  }

  /// Each comment stands before a token; a comment that documents a declaration stays on
  /// the line of that declaration if its line is cut.
  void place_comments(const std::vector<std::optional<Span>>& documented) {
    for (std::size_t c = 0; c < comments_.size(); ++c) {
      const std::size_t next = token_after(comments_[c].span.begin);
      const bool trailing = next > 0 && line(tokens_.places[next - 1].end) == line(comments_[c].span.begin);
      std::size_t place = next;
      if (trailing && documented[c] && documented[c]->begin < comments_[c].span.begin) place = anchor(*documented[c], next);
      after_.push_back(place);
      trailing_.push_back(trailing);
      order_.push_back(c);
    }
    std::stable_sort(order_.begin(), order_.end(), [&](std::size_t a, std::size_t b) { return after_[a] < after_[b]; });
  }

  std::size_t anchor(Span target, std::size_t next) const {
    std::size_t first_after = token_after(target.end);
    if (first_after > next) {  // Still open: its block begins on this line.
      first_after = token_after(target.begin) + 1;
      while (first_after < next && tokens_.code(first_after - 1) != Code::open_curly) ++first_after;
    }
    for (std::size_t t = first_after; t < next; ++t) {
      if (layout_.breaks[t] == Break::statement) return first_after;
    }
    return next;
  }

  // ---- Writing ----

  void write_token(std::size_t t) {
    const std::uint32_t begin = tokens_.places[t].begin;
    if (layout_.breaks[t] != Break::none || t == 0 || at_line_start_) {
      start_line(begin, t);
    } else if ((t < spaced_.size() && spaced_[t]) || space_before(t, tokens_, roles_)) {
      const bool entry = t < spaced_.size() && spaced_[t];
      out_ += entry ? "  " : " ";
    }
    out_ += file_.text.substr(begin, tokens_.places[t].end - begin);
    last_offset_ = tokens_.places[t].end;
    at_line_start_ = false;
  }

  void write_comment(std::size_t c, std::size_t next) {
    const Span span = comments_[c].span;
    if (trailing_[c] && !at_line_start_) {
      out_ += "  ";
    } else {
      start_line(span.begin, next);
    }
    std::string text = file_.text.substr(span.begin, span.end - span.begin);
    text.erase(text.find_last_not_of(" \t") + 1);
    out_ += text;
    last_offset_ = std::max(last_offset_, span.end);
    end_line();
  }

  void end_line() {
    if (!out_.empty() && out_.back() != '\n') out_ += '\n';
    at_line_start_ = true;
  }

  /// Begins the line of token `t`, or of a comment before it.
  void start_line(std::uint32_t offset, std::size_t t) {
    end_line();
    const bool gap = line(offset) > line(last_offset_) + 1;
    const bool statement = t >= tokens_.size() || layout_.breaks[t] == Break::statement;
    const bool closing = t < tokens_.size() && tokens_.code(t) == Code::close_curly;
    if (gap && statement && !out_.empty() && !(closing && offset == tokens_.places[t].begin) && !out_.ends_with("{\n")) out_ += '\n';
    std::size_t depth = layout_.depth[std::min(t, tokens_.size())];
    if (closing && offset != tokens_.places[t].begin) ++depth;
    if (!statement && t > 0) ++depth;
    out_.append(kIndent * depth, ' ');
    at_line_start_ = false;
  }

  const SourceFile& file_;
  const Tokens& tokens_;
  const std::vector<ast::Comment>& comments_;
  Roles roles_;
  Layout layout_;
  std::vector<bool> spaced_;           ///< Entries inside a block on one line: set off by two spaces.
  std::vector<std::size_t> after_;     ///< For each comment the token it stands before.
  std::vector<bool> trailing_;
  std::vector<std::size_t> order_;     ///< Comments in the order they are written.
  std::string out_;
  std::uint32_t last_offset_ = 0;
  bool at_line_start_ = true;
};

std::string joined(const SourceFile& file, const Tokens& tokens) {
  std::string text;
  for (const Token& token : tokens.places) text += file.text.substr(token.begin, token.end - token.begin) + "\n";
  return text;
}

}  // namespace

std::optional<std::string> tidy(const SourceFile& file, Diagnostics& diagnostics) {
  const std::size_t errors = diagnostics.error_count();
  Ast ast = parse(file, diagnostics);
  if (diagnostics.error_count() > errors) return std::nullopt;
  Diagnostics known;
  const Tokens tokens = tokenize(file, known);
  std::string text = Tidier(file, ast, tokens, recognise(tokens).nodes).run();
  const SourceFile again = make_source(file.id, file.name, text);
  TARN_CHECK(joined(again, tokenize(again, known)) == joined(file, tokens));
  return text;
}

}  // namespace tarn
