#include "lang/syntax/tokens.h"

#include <array>
#include <unordered_map>

#include "lang/quantities/units.h"
#include "lang/syntax/characters.h"

namespace tarn {
namespace {

struct Spelling {
  Code code;
  std::string_view text;
};

constexpr auto kSymbols = std::to_array<Spelling>({
#define TARN_SYMBOL(id, text) {Code::id, text},
#include "lang/syntax/tokens.def"
});

constexpr auto kWords = std::to_array<Spelling>({
#define TARN_SOFT(id, text) {Code::id, text},
#define TARN_RESERVED(id, text) {Code::id, text},
#include "lang/syntax/tokens.def"
});

Code word_code(std::string_view word) {
  static const std::unordered_map<std::string_view, Code> codes = [] {
    std::unordered_map<std::string_view, Code> map;
    for (const Spelling& w : kWords) map.emplace(w.text, w.code);
    return map;
  }();
  const auto found = codes.find(word);
  if (found != codes.end()) return found->second;
  return find_unit(word) ? Code::unit_word : Code::word;
}

constexpr std::size_t kMaxTokens = 500'000;

bool is_opening(Code code) {
  return code == Code::open_round || code == Code::open_square || code == Code::open_curly;
}
bool is_closing(Code code) {
  return code == Code::close_round || code == Code::close_square || code == Code::close_curly;
}

class Tokenizer {
 public:
  Tokenizer(const SourceFile& file, Diagnostics& diagnostics)
      : file_(file), text_(file.text), diagnostics_(diagnostics), at_(file.line_starts.front()) {}

  Tokens run() {
    while (at_ < text_.size() && tokens_.usable) next();
    return std::move(tokens_);
  }

 private:
  void next() {
    const char c = text_[at_];
    if (c == ' ' || c == '\t' || c == '\n' || c == '\r') {
      ++at_;
    } else if (c == '#') {
      comment();
    } else if (c == '"') {
      quoted();
    } else if (is_digit(c)) {
      number();
    } else if (const std::size_t length = letter_length(text_.substr(at_)); length > 0) {
      word();
    } else if (c == '%') {
      push(Code::percent, 1);
    } else if (c == '|' && ketbra_length() > 0) {
      push(Code::ketbra, ketbra_length());
    } else {
      symbol();
    }
  }

  void push(Code code, std::size_t length) {
    const Span span = here(length);
    tokens_.codes.push_back(static_cast<char>(code));
    tokens_.places.push_back({span.begin, span.end});
    at_ += length;
    watch_depth(code, span);
    if (tokens_.size() > kMaxTokens) {
      diagnostics_.report(span, diag::text_too_long, kMaxTokens);
      tokens_.usable = false;
    }
  }

  /// Bounds what the grammar will recurse into: open brackets, and of each open
  /// bracket the operations that nest to the right.
  void watch_depth(Code code, Span span) {
    if (is_opening(code)) chains_.push_back(0);
    if (is_closing(code) && chains_.size() > 1) {
      total_ -= chains_.back();
      chains_.pop_back();
    }
    if (code == Code::comma || code == Code::close_curly || starts_statement(code)) {
      total_ -= chains_.back();
      chains_.back() = 0;
    }
    if (nests_to_the_right(code)) {
      ++chains_.back();
      ++total_;
    }
    if (chains_.size() > kMaxDepth + 1) {
      diagnostics_.report(span, diag::too_deep, kMaxDepth);
      tokens_.usable = false;
    } else if (total_ > kMaxChain) {
      diagnostics_.report(span, diag::expression_too_long, kMaxChain);
      tokens_.usable = false;
    }
  }

  static bool nests_to_the_right(Code code) {
    return code == Code::caret || code == Code::minus || code == Code::link || code == Code::not_ || code == Code::if_;
  }

  static bool starts_statement(Code code) {
    return is_reserved(code) && code != Code::if_ && code != Code::else_ && code != Code::then && code != Code::not_ &&
           code != Code::and_ && code != Code::or_ && code != Code::when && code != Code::under;
  }

  void comment() {
    auto stop = text_.find('\n', at_);
    if (stop == std::string_view::npos) stop = text_.size();
    const std::size_t next_line = stop;
    if (stop > at_ && text_[stop - 1] == '\r') --stop;
    const bool doc = text_.substr(at_).starts_with("##");
    tokens_.comments.push_back({here(stop - at_), doc});
    at_ = next_line;
  }

  void quoted() {
    const auto stop = text_.find_first_of("\"\n\r", at_ + 1);
    if (stop != std::string_view::npos && text_[stop] == '"') return push(Code::text, stop + 1 - at_);
    const std::size_t length = (stop == std::string_view::npos ? text_.size() : stop) - at_;
    diagnostics_.report(here(length), diag::unterminated_text).remedy("close it with `\"` before the line ends");
    push(Code::text, length);
  }

  void number() {
    std::size_t stop = digits_from(at_);
    if (stop + 1 < text_.size() && text_[stop] == '.' && is_digit(text_[stop + 1])) stop = digits_from(stop + 1);
    if (stop < text_.size() && (text_[stop] == 'e' || text_[stop] == 'E')) {
      std::size_t exponent = stop + 1;
      if (exponent < text_.size() && (text_[exponent] == '+' || text_[exponent] == '-')) ++exponent;
      if (exponent < text_.size() && is_digit(text_[exponent])) stop = digits_from(exponent);
    }
    const std::string_view digits = text_.substr(at_, stop - at_);
    push(digits == "1" ? Code::one : Code::number, digits.size());
  }

  std::size_t digits_from(std::size_t from) const {
    while (from < text_.size() && is_digit(text_[from])) ++from;
    return from;
  }

  void word() {
    std::size_t stop = at_;
    while (stop < text_.size()) {
      const std::size_t length = is_digit(text_[stop]) ? 1 : letter_length(text_.substr(stop));
      if (length == 0) break;
      stop += length;
    }
    push(word_code(text_.substr(at_, stop - at_)), stop - at_);
  }

  /// Length of `|01><10|` at this place, 0 if there is none.
  std::size_t ketbra_length() const {
    const auto bits = [&](std::size_t from) {
      while (from < text_.size() && (text_[from] == '0' || text_[from] == '1')) ++from;
      return from;
    };
    const std::size_t middle = bits(at_ + 1);
    if (middle == at_ + 1 || text_.substr(middle, 2) != "><") return 0;
    const std::size_t last = bits(middle + 2);
    if (last == middle + 2 || last >= text_.size() || text_[last] != '|') return 0;
    return last + 1 - at_;
  }

  void symbol() {
    for (const Spelling& s : kSymbols) {
      if (text_.substr(at_).starts_with(s.text)) return push(s.code, s.text.size());
    }
    push(Code::unknown, character_length(text_.substr(at_)));
  }

  Span here(std::size_t length) const {
    return {file_.id, static_cast<std::uint32_t>(at_), static_cast<std::uint32_t>(at_ + length)};
  }

  const SourceFile& file_;
  std::string_view text_;
  Diagnostics& diagnostics_;
  std::size_t at_;
  Tokens tokens_;
  std::vector<unsigned> chains_{0};  ///< For each open bracket, the text itself first.
  unsigned total_ = 0;
};

/// True if every character may stand in a text; else the first that may not was reported.
bool check_characters(const SourceFile& file, Diagnostics& diagnostics) {
  const std::size_t bad = first_bad_character(file.text);
  if (bad == file.text.size()) return true;
  const auto offset = static_cast<std::uint32_t>(bad);
  const Span span{file.id, offset, offset + 1};
  if (file.text[bad] == '\0') {
    diagnostics.report(span, diag::nul_character);
  } else {
    diagnostics.report(span, diag::not_utf8, static_cast<unsigned char>(file.text[bad]))
        .remedy("save the file as UTF-8 text");
  }
  return false;
}

}  // namespace

Tokens tokenize(const SourceFile& file, Diagnostics& diagnostics) {
  if (!check_characters(file, diagnostics)) {
    Tokens none;
    none.usable = false;
    return none;
  }
  return Tokenizer(file, diagnostics).run();
}

std::string_view spelling(Code code) {
  for (const auto& s : kSymbols) {
    if (s.code == code) return s.text;
  }
  for (const auto& w : kWords) {
    if (w.code == code) return w.text;
  }
  if (code == Code::number || code == Code::one) return "a number";
  if (code == Code::percent) return "%";
  if (code == Code::text) return "a text in quotes";
  if (code == Code::ketbra) return "an operator such as `|0><1|`";
  return "a word";
}

bool is_word(Code code) { return code >= kFirstName && code <= kLastReserved; }
bool is_reserved(Code code) { return code >= kFirstReserved && code <= kLastReserved; }

bool ends_operand(Code code) {
  return (is_word(code) && !is_reserved(code)) || code == Code::number || code == Code::one || code == Code::percent ||
         code == Code::text || code == Code::ketbra || code == Code::close_round || code == Code::close_square;
}

}  // namespace tarn
