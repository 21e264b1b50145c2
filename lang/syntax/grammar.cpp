#include "lang/syntax/grammar.h"

#include <algorithm>
#include <type_traits>

#include "lang/support/check.h"

namespace tarn {
namespace {

namespace peg = tao::pegtl;

/// What recognition carries along: nodes so far, and the furthest failure.
struct State {
  Recognised result;
  Failure furthest;

  /// One for each rule entered that has a tag or words of its own.
  struct Frame {
    std::size_t nodes;
    std::uint32_t token;
    std::size_t expected;  ///< Expectations at that very token before the rule began.
  };
  std::vector<Frame> frames;
  std::vector<std::uint32_t> open_blocks;

  void expect(std::uint32_t token, std::string_view words) {
    if (token < furthest.token) return;
    if (token > furthest.token) furthest = {token, {}};
    auto& list = furthest.expected;
    if (!words.empty() && std::find(list.begin(), list.end(), words) == list.end()) list.push_back(words);
  }
  /// Tokens from `from` up to where the statement that begins there failed.
  std::size_t note_failure(std::size_t from) {
    const std::size_t length = std::max(furthest.token, static_cast<std::uint32_t>(from) + 1) - from;
    result.failures.push_back(std::move(furthest));
    furthest = {};
    return length;
  }
  /// Nodes past the place where the input stands are left over from a branch that failed.
  void drop_beyond(std::uint32_t token) {
    while (!result.nodes.empty() && result.nodes.back().end > token) result.nodes.pop_back();
  }
  void enter(std::uint32_t token) {
    drop_beyond(token);
    frames.push_back({result.nodes.size(), token, furthest.token == token ? furthest.expected.size() : 0});
  }
};

template <class Rule>
concept Tagged = requires { Rule::tag; };
template <class Rule>
concept Worded = requires { Rule::expected; };
template <class Rule>
concept Spelt = requires { Rule::code; };

/// A node with one child says no more than the child.
constexpr bool is_passed_through(Tag tag) {
  return tag == Tag::either || tag == Tag::both || tag == Tag::comparison || tag == Tag::sum || tag == Tag::product ||
         tag == Tag::sign || tag == Tag::power;
}

void leave_node(State& state, Tag tag, std::uint32_t begin, std::uint32_t end, std::size_t first_node) {
  auto& nodes = state.result.nodes;
  const auto size = static_cast<std::uint32_t>(nodes.size() - first_node);
  if (is_passed_through(tag) && size > 0 && nodes.back().size == size) return;
  nodes.push_back({tag, begin, end, size + 1});
}

template <class Input>
std::uint32_t token_at(const Input& in) {
  return static_cast<std::uint32_t>(in.byte());
}

template <class Rule>
struct Control : peg::normal<Rule> {
  static constexpr bool kHasFrame = Tagged<Rule> || Worded<Rule>;

  template <class Input>
  static void start(const Input& in, State& state) {
    if constexpr (kHasFrame) state.enter(token_at(in));
  }

  template <class Input>
  static void success(const Input& in, State& state) {
    if constexpr (kHasFrame) {
      const State::Frame frame = state.frames.back();
      state.frames.pop_back();
      state.drop_beyond(token_at(in));
      if constexpr (Tagged<Rule>) leave_node(state, Rule::tag, frame.token, token_at(in), frame.nodes);
    }
    if constexpr (std::is_same_v<Rule, grammar::open_block>) state.open_blocks.push_back(token_at(in) - 1);
    if constexpr (std::is_same_v<Rule, grammar::not_closed>) {
      state.result.open_blocks.push_back({state.open_blocks.back(), token_at(in)});
    }
    if constexpr (std::is_same_v<Rule, grammar::not_closed> || std::is_same_v<Rule, grammar::close_block>) {
      state.open_blocks.pop_back();
    }
  }

  template <class Input>
  static void failure([[maybe_unused]] const Input& in, State& state) {
    if constexpr (kHasFrame) {
      const State::Frame frame = state.frames.back();
      state.frames.pop_back();
      state.result.nodes.resize(frame.nodes);
      if constexpr (Worded<Rule>) {
        if (state.furthest.token == frame.token) state.furthest.expected.resize(frame.expected);
        state.expect(frame.token, Rule::expected);
      }
    } else if constexpr (Spelt<Rule>) {
      state.expect(token_at(in), spelling(Rule::code));
    }
  }
};

}  // namespace

Recognised recognise(const Tokens& tokens) {
  State state;
  peg::memory_input<peg::tracking_mode::lazy> input(tokens.codes.data(), tokens.codes.data() + tokens.codes.size(), "");
  const bool complete = peg::parse<grammar::file, peg::nothing, Control>(input, state);
  TARN_CHECK(complete && state.frames.empty());
  return std::move(state.result);
}

}  // namespace tarn
