#include "lang/syntax/expectations.h"

#include <algorithm>
#include <array>
#include <string>
#include <vector>

#include "lang/quantities/units.h"
#include "lang/support/near.h"
#include "lang/syntax/characters.h"
#include "lang/syntax/habits.h"

namespace tarn {
namespace {

std::string quote(std::string_view text) { return "`" + std::string(text) + "`"; }

bool is_number(Code code) { return code == Code::number || code == Code::one; }

bool starts_operand(Code code) {
  return (is_word(code) && !is_reserved(code)) || is_number(code) || code == Code::text || code == Code::ketbra ||
         code == Code::open_round;
}

bool is_comparison(Code code) {
  return code == Code::less_equal || code == Code::greater_equal || code == Code::equal || code == Code::not_equal ||
         code == Code::less || code == Code::greater;
}

/// The failure with what stands around it.
class Stop {
 public:
  Stop(const SourceFile& file, const Tokens& tokens, const Failure& failure)
      : file_(file), tokens_(tokens), failure_(failure), at_(failure.token) {}

  Code here() const { return tokens_.code(at_); }
  Code before() const { return at_ == 0 ? Code{} : tokens_.code(at_ - 1); }
  Code after() const { return code_at(1); }
  /// Counted from the failure.
  Code code_at(int offset) const {
    const std::int64_t at = static_cast<std::int64_t>(at_) + offset;
    return at < 0 ? Code{} : tokens_.code(static_cast<std::size_t>(at));
  }
  bool at_end() const { return at_ >= tokens_.size(); }

  bool expects(std::string_view words) const {
    const auto& list = failure_.expected;
    return std::find(list.begin(), list.end(), words) != list.end();
  }

  /// Tokens from `from` to `to`, counted from the failure, both included.
  Span span(int from, int to) const {
    const Token first = token(from);
    return {file_.id, first.begin, token(to).end};
  }
  std::string text(int from, int to) const {
    constexpr std::size_t kLongest = 40;
    const Span place = span(from, to);
    std::string result = file_.text.substr(place.begin, place.end - place.begin);
    return result.size() <= kLongest ? result : cut(result, kLongest) + "...";
  }
  std::string text(int i) const { return text(i, i); }

  /// Marks the token, or the end of the last one where the text ends.
  Span span() const {
    if (!at_end()) return span(0, 0);
    const std::uint32_t end = tokens_.size() == 0 ? file_.line_starts.front() : tokens_.places.back().end;
    return {file_.id, end, end};
  }
  std::string found() const { return at_end() ? "the end of the file" : quote(text(0)); }

  bool same_line_as_before() const {
    if (at_ == 0 || at_end()) return false;
    return position(file_, token(-1).begin).line == position(file_, token(0).begin).line;
  }

  /// Round or square bracket still open at the failure within its statement.
  std::optional<std::uint32_t> open_bracket() const {
    int depth = 0;
    for (std::uint32_t i = at_; i > 0; --i) {
      const Code code = tokens_.code(i - 1);
      if (code == Code::open_curly || code == Code::close_curly) return std::nullopt;
      if (code == Code::close_round || code == Code::close_square) ++depth;
      if (code != Code::open_round && code != Code::open_square) continue;
      if (depth == 0) return i - 1;
      --depth;
    }
    return std::nullopt;
  }
  /// True if the statement at hand is a pace.
  bool in_pace() const {
    for (std::uint32_t i = at_; i > 0; --i) {
      const Code code = tokens_.code(i - 1);
      if (code == Code::pace) return true;
      if (code == Code::open_curly || code == Code::close_curly) return false;
      if (is_reserved(code) && code != Code::over && code != Code::for_) return false;
    }
    return false;
  }
  Span token_span(std::uint32_t i) const { return {file_.id, tokens_.places[i].begin, tokens_.places[i].end}; }
  Code code(std::uint32_t i) const { return tokens_.code(i); }

  /// The expected words of the language, without the descriptions.
  std::vector<std::string_view> expected_words() const {
    std::vector<std::string_view> words;
    for (const std::string_view e : failure_.expected) {
      if (e.find_first_of(" `") == std::string_view::npos && e.size() > 1) words.push_back(e);
    }
    return words;
  }

  std::string expected() const {
    std::string joined;
    const auto& list = failure_.expected;
    for (std::size_t i = 0; i < list.size(); ++i) {
      if (i > 0) joined += i + 1 == list.size() ? (list.size() > 2 ? ", or " : " or ") : ", ";
      const bool plain = list[i].find_first_of(" `") == std::string_view::npos;
      joined += plain ? quote(list[i]) : std::string(list[i]);
    }
    return joined.empty() ? "something else" : joined;
  }

 private:
  Token token(int offset) const { return tokens_.places[static_cast<std::size_t>(static_cast<std::int64_t>(at_) + offset)]; }

  static std::string cut(const std::string& text, std::size_t longest) {
    std::size_t length = 0;
    while (length < longest) length += character_length(std::string_view(text).substr(length));
    return text.substr(0, length);
  }

  const SourceFile& file_;
  const Tokens& tokens_;
  const Failure& failure_;
  std::uint32_t at_;
};

bool report_character(const Stop& stop, Diagnostics& diagnostics) {
  if (stop.here() != Code::unknown) return false;
  auto tail = diagnostics.report(stop.span(), diag::unexpected_character, stop.text(0));
  const std::string_view plain = plain_spelling(stop.text(0));
  if (!plain.empty()) tail.remedy("write " + (plain.find(' ') == std::string_view::npos ? quote(plain) : std::string(plain)));
  return true;
}

bool report_number(const Stop& stop, Diagnostics& diagnostics) {
  if (stop.here() != Code::dot) return false;
  if (is_number(stop.before())) {
    diagnostics.report(stop.span(-1, 0), diag::number_format, stop.text(-1, 0)).remedy("write " + quote(stop.text(-1, 0) + "0"));
    return true;
  }
  if (is_number(stop.after())) {
    diagnostics.report(stop.span(0, 1), diag::number_format, stop.text(0, 1)).remedy("write " + quote("0" + stop.text(0, 1)));
    return true;
  }
  return false;
}

/// `2 GHz^2`
bool report_unit_power(const Stop& stop, Diagnostics& diagnostics) {
  const bool unit = stop.here() == Code::unit_word || stop.here() == Code::percent;
  if (!unit || !is_number(stop.before()) || stop.after() != Code::caret) return false;
  const std::string number = stop.text(-1);
  const std::string word = stop.text(0);
  const std::string power = "^" + (is_number(stop.code_at(2)) ? stop.text(2) : "2");
  std::string remedy = "write `(" + number + " " + word + ")" + power + "`, or `" + number + " [" + word + power + "]`";
  if (word == "s") remedy += "; if the place along the anneal is meant, `" + number + "*s" + power + "`";
  diagnostics.report(stop.span(-1, 1), diag::unit_power, number + " " + word).remedy(remedy);
  return true;
}

/// Symbols of other notations: `2**3`, `// text`, `[1, 2]`, `a := 3`, `at 5 ns`.
std::string other_notation(const Stop& stop) {
  const Code here = stop.here(), before = stop.before();
  if (here == Code::times && before == Code::times) return "a power is written `^`";
  if (here == Code::over_sign && before == Code::over_sign) return "a comment starts with `#`";
  if (here == Code::open_square && before == Code::in) return "a range is written `LOW .. HIGH`";
  if (here == Code::in && stop.after() == Code::open_square) return "`in [unit]` stands before `at` and `along`";
  if (here == Code::open_square && stop.expects("a value")) return "several values are `list(a, b, ...)`";
  if (here == Code::open_round && stop.code_at(-2) == Code::observe) return "an answer has a name: " + quote("observe x = " + stop.text(-1) + "(...)");
  if (here == Code::assign && before == Code::colon) return "a default follows `=`, a type `:`; one may be left out";
  if (is_number(here) && before == Code::comma && stop.expects("a name")) return "several values are `list(a, b, ...)`";
  if (is_number(here) && stop.expects("`t =` or `s =`")) {
    return "write " + quote("at t = " + (stop.after() == Code::unit_word ? stop.text(0, 1) : stop.text(0)));
  }
  return {};
}

/// A word of another notation, or a slip in a reserved word where the grammar has no list of them.
std::string meant_word(const Stop& stop) {
  if (stop.here() != Code::word && stop.here() != Code::unit_word) return {};
  const std::string word = stop.text(0);
  std::string_view meant = statement_for(word);
  std::vector<std::string_view> reserved;
  for (auto code = static_cast<unsigned>(kFirstReserved); code <= static_cast<unsigned>(kLastReserved); ++code) {
    reserved.push_back(spelling(static_cast<Code>(code)));
  }
  if (meant.empty() && word.size() > 2) meant = near_word(word, reserved);
  return meant.empty() ? "" : "did you mean " + quote(meant) + "?";
}

/// A slip in a word of the language: `ovr`.
bool report_slip(const Stop& stop, Diagnostics& diagnostics) {
  if (!is_word(stop.here()) || is_reserved(stop.here())) return false;
  const std::string word = stop.text(0);
  const std::string_view meant = near_word(word, stop.expected_words());
  if (meant.empty() || word.size() < 3) return false;
  diagnostics.report(stop.span(), diag::unexpected, stop.expected(), stop.found())
      .remedy("did you mean " + quote(meant) + "?");
  return true;
}

/// A word after a number that is no unit.
bool report_after_number(const Stop& stop, Diagnostics& diagnostics) {
  const bool word = is_word(stop.here()) && !is_reserved(stop.here());
  if (!word || !is_number(stop.before()) || !stop.expects("an operator") || !stop.same_line_as_before()) return false;
  const std::string product = quote(stop.text(-1) + "*" + stop.text(0));
  const std::string near = near_unit(stop.text(0));
  if (near.empty()) {
    diagnostics.report(stop.span(), diag::missing_operator, stop.text(-1), stop.text(0))
        .remedy("to multiply, write " + product + " (" + quote(stop.text(0)) + " is not a unit)");
  } else {
    diagnostics.report(stop.span(), diag::unknown_unit, stop.text(0))
        .remedy("did you mean " + quote(near) + "? to multiply, write " + product);
  }
  return true;
}

bool report_missing_operator(const Stop& stop, Diagnostics& diagnostics) {
  if (!stop.expects("an operator") || !ends_operand(stop.before()) || !stop.same_line_as_before()) return false;
  if (is_comparison(stop.here())) {
    diagnostics.report(stop.span(), diag::chained_comparison).remedy("join two of them: `a < b and b < c`");
    return true;
  }
  if (stop.here() == Code::assign) {
    diagnostics.report(stop.span(), diag::unexpected, stop.expected(), stop.found()).remedy("to compare, write `==`");
    return true;
  }
  if (!starts_operand(stop.here())) return false;
  auto tail = diagnostics.report(stop.span(), diag::missing_operator, stop.text(-1), stop.text(0));
  const bool closing = stop.before() == Code::close_round || stop.before() == Code::close_square;
  if (stop.here() != Code::text && stop.before() != Code::text) {
    const bool unit = stop.before() == Code::unit_word && is_number(stop.code_at(-2));
    tail.remedy("to multiply, write " + (closing ? "`*` between them" : quote(stop.text(unit ? -2 : -1, -1) + "*" + stop.text(0))));
  }
  return true;
}

/// `pace ramp to 1 over ta hold for 5 ns`
bool report_missing_comma(const Stop& stop, Diagnostics& diagnostics) {
  constexpr auto kPieces = std::to_array<Code>({Code::ramp, Code::hold, Code::step, Code::follow});
  const bool piece = std::find(kPieces.begin(), kPieces.end(), stop.here()) != kPieces.end();
  if (!piece || !ends_operand(stop.before()) || !stop.in_pace()) return false;
  const std::string word = stop.text(0);
  diagnostics.report(stop.span(), diag::unexpected, "a comma between two pieces of the pace", stop.found())
      .remedy("write " + quote(", " + word));
  return true;
}

/// Words that join parts of a statement: where one stands, a name is rather missing.
bool joins(Code code) {
  constexpr auto kJoining = std::to_array<Code>({Code::along, Code::and_, Code::at, Code::each, Code::else_, Code::for_,
                                                 Code::if_, Code::in, Code::not_, Code::or_, Code::over, Code::then,
                                                 Code::under, Code::when, Code::where});
  return std::find(kJoining.begin(), kJoining.end(), code) != kJoining.end();
}

/// What stands behind the name of a declaration.
bool follows_name(Code code) {
  return code == Code::assign || code == Code::colon || code == Code::open_curly;
}

bool report_reserved(const Stop& stop, Diagnostics& diagnostics) {
  const bool joining = joins(stop.here()) && !follows_name(stop.after());
  if (!is_reserved(stop.here()) || joining || !stop.expects("a name") || !stop.same_line_as_before()) return false;
  auto tail = diagnostics.report(stop.span(), diag::reserved_word, stop.text(0));
  if (stop.before() == Code::use && stop.here() == Code::spectrum) tail.remedy("did you mean `use spectra`?");
  else tail.remedy("choose another name, such as " + quote(stop.text(0) + "_1"));
  return true;
}

bool report_open_bracket(const Stop& stop, Diagnostics& diagnostics) {
  if (!stop.expects(spelling(Code::close_round)) && !stop.expects(spelling(Code::close_square))) return false;
  if (!stop.at_end() && !is_reserved(stop.here()) && stop.here() != Code::close_curly) return false;
  const std::optional<std::uint32_t> open = stop.open_bracket();
  if (!open) return false;
  diagnostics.report(stop.token_span(*open), diag::unclosed_bracket, spelling(stop.code(*open)))
      .note(stop.span(), "read up to here");
  return true;
}

}  // namespace

void report_failure(const SourceFile& file, const Tokens& tokens, const Failure& failure, Diagnostics& diagnostics) {
  const Stop stop(file, tokens, failure);
  const bool told = report_character(stop, diagnostics) || report_number(stop, diagnostics) ||
                    report_unit_power(stop, diagnostics) || report_slip(stop, diagnostics) ||
                    report_missing_comma(stop, diagnostics) || report_after_number(stop, diagnostics) ||
                    report_open_bracket(stop, diagnostics) ||
                    report_missing_operator(stop, diagnostics) ||
                    report_reserved(stop, diagnostics);
  if (told) return;
  const std::string remedy = other_notation(stop);
  diagnostics.report(stop.span(), diag::unexpected, stop.expected(), stop.found()).remedy(remedy.empty() ? meant_word(stop) : remedy);
}

void report_open_block(const SourceFile& file, const Tokens& tokens, const OpenBlock& block, Diagnostics& diagnostics) {
  const Token open = tokens.places[block.open];
  auto tail = diagnostics.report({file.id, open.begin, open.end}, diag::unclosed_block);
  if (block.token < tokens.size()) {
    const Token next = tokens.places[block.token];
    tail.note({file.id, next.begin, next.end}, "a new declaration starts here");
  }
  tail.remedy("close it with `}`");
}

}  // namespace tarn
