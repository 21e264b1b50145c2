#include <algorithm>
#include <array>
#include <cmath>

#include "lang/check/experiment.h"
#include "lang/check/expression.h"
#include "lang/check/remedies.h"
#include "lang/check/samples.h"

namespace tarn {
namespace {

constexpr std::string_view kEquations =
    "equations available: schroedinger, lindblad, davies, redfield, coarse_grained, universal, hierarchy";
constexpr auto kLaterEquations = std::to_array<std::string_view>({"hybrid", "blip"});
constexpr auto kEquationWords = std::to_array<std::string_view>({"schroedinger", "lindblad", "davies", "redfield", "coarse_grained",
                                                         "universal", "hybrid", "blip", "hierarchy"});
constexpr auto kMemories = std::to_array<std::string_view>({"markov", "growing", "driven"});

constexpr std::int64_t kMostTrajectories = 1'000'000;
constexpr std::int64_t kDeepest = 1000;

std::optional<EquationKind> kind_of(std::string_view word) {
  for (auto kind = EquationKind::schroedinger; kind <= EquationKind::hierarchy;
       kind = static_cast<EquationKind>(static_cast<int>(kind) + 1)) {
    if (word_of(kind) == word) return kind;
  }
  return std::nullopt;
}

/// What an equation may be given.
std::string_view options_of(EquationKind kind) {
  switch (kind) {
    case EquationKind::davies: return "`davies` or `davies(shift = off)`";
    case EquationKind::universal: return "`universal` or `universal(shift = off)`";
    case EquationKind::redfield: return "`redfield(memory = markov)`, growing or driven; `shift = off`";
    case EquationKind::coarse_grained: return "`coarse_grained(window = auto)` or a time; `shift = off`";
    case EquationKind::hierarchy: return "`hierarchy` or `hierarchy(depth = 5)`";
    case EquationKind::none:
    case EquationKind::schroedinger:
    case EquationKind::lindblad: break;
  }
  return "";
}

/// The options of one equation, written in its brackets.
class OptionReader {
 public:
  OptionReader(Session& session, const Scope& scope, EquationI& equation) : session_(session), scope_(scope), equation_(equation) {}

  void read(const ast::Path& path) {
    std::vector<std::string> seen;
    for (const ast::Given& given : path.given) {
      const bool depth = !given.name && equation_.kind == EquationKind::hierarchy;
      const std::string name = depth ? "depth" : given.name ? given.name->text : "";
      if (std::find(seen.begin(), seen.end(), name) != seen.end() && !name.empty()) {
        session_.report(given.span, diag::argument_twice, name);
      } else if (!read_option(name, given)) {
        report_unknown(given);
      }
      seen.push_back(name);
    }
  }

 private:
  bool is(EquationKind kind) const { return equation_.kind == kind; }

  /// False for an option that the equation does not have.
  bool read_option(const std::string& name, const ast::Given& given) {
    if (name == "shift" && takes_levels(equation_.kind)) {
      const std::string word = chosen(given, std::array<std::string_view, 2>{"on", "off"}, "`on` or `off`");
      equation_.lamb_shift = word != "off";
      return true;
    }
    if (name == "memory" && is(EquationKind::redfield)) {
      const std::string word = chosen(given, kMemories, "`markov`, `growing` or `driven`");
      const auto row = std::find(kMemories.begin(), kMemories.end(), word);
      if (row != kMemories.end()) equation_.memory = static_cast<MemoryI>(row - kMemories.begin());
      return true;
    }
    if (name == "window" && is(EquationKind::coarse_grained)) {
      read_window(given);
      return true;
    }
    if (name != "depth" || !is(EquationKind::hierarchy)) return false;
    read_depth(given);
    return true;
  }

  void report_unknown(const ast::Given& given) {
    const std::string text = excerpt(session_, given.span);
    const std::string_view options = options_of(equation_.kind);
    const std::string_view word = word_of(equation_.kind);
    session_.report(given.span, diag::unknown_argument, word, given.name ? given.name->text : text)
        .remedy(options.empty() ? fmt::format("`equation {}` takes none", word) : std::string(options));
  }

  std::string word(const ast::Given& given) const {
    const auto* use = std::get_if<ast::Use>(&session_.ast(scope_).expr(given.value).node);
    const bool plain = use != nullptr && use->path.steps.size() == 1 && !use->path.call && !use->path.steps.front().index;
    return plain ? use->path.steps.front().name.text : "";
  }

  /// One of some words; reports what is none.
  std::string chosen(const ast::Given& given, std::span<const std::string_view> words, std::string_view expected) {
    const std::string found = word(given);
    if (std::find(words.begin(), words.end(), found) != words.end()) return found;
    const Span span = span_of(session_, scope_, given.value);
    session_.report(span, diag::wrong_kind, expected, fmt::format("`{}`", excerpt(session_, span)));
    return {};
  }

  void read_window(const ast::Given& given) {
    if (word(given) == "auto") return;
    const auto window = evaluate_quantity(session_, scope_, given.value, kTime);
    if (!window) return;
    equation_.window = window;
    const auto value = value_at_defaults(session_, *window);
    if (!value || *value > 0) return;
    session_.report(span_of(session_, scope_, given.value), diag::not_positive, "the window",
                    in_unit(*value, written_unit(session_.ast(scope_), given.value, kTime)))
        .remedy("`window = auto` chooses one");
  }

  void read_depth(const ast::Given& given) {
    const auto depth = evaluate_count(session_, scope_, given.value);
    if (!depth) return;
    const Span span = span_of(session_, scope_, given.value);
    if (*depth < 1) session_.report(span, diag::count_too_small, "the depth of a hierarchy", 1);
    else if (*depth > kDeepest) session_.report(span, diag::out_of_range, "depth", fmt::to_string(*depth), "1", fmt::to_string(kDeepest));
    else equation_.depth = static_cast<std::uint32_t>(*depth);
  }

  Session& session_;
  const Scope& scope_;
  EquationI& equation_;
};

EquationI read_equation(Session& session, const Scope& scope, const ast::Path& path) {
  EquationI equation;
  equation.span = path.span;
  const std::string& word = path.steps.front().name.text;
  const bool plain = path.steps.size() == 1 && !path.steps.front().index;
  const auto kind = plain ? kind_of(word) : std::nullopt;
  const bool later = plain && std::find(kLaterEquations.begin(), kLaterEquations.end(), word) != kLaterEquations.end();
  if (later) {
    session.report(path.span, diag::not_available, fmt::format("`{}`", excerpt(session, path.span)), std::string(kEquations));
  } else if (!kind) {
    session.report(path.span, diag::unknown_equation, excerpt(session, path.span)).remedy(near_and(word, kEquationWords, kEquations));
  } else {
    equation.kind = *kind;
    OptionReader(session, scope, equation).read(path);
  }
  return equation;
}

void check_labels(Session& session, const ast::Equation& statement, const Instance& instance) {
  for (std::size_t k = 0; k < instance.equations.size(); ++k) {
    for (std::size_t j = 0; j < k; ++j) {
      if (instance.equations[j].label != instance.equations[k].label) continue;
      session.report(statement.choices[k].span, diag::label_twice, instance.equations[k].label)
          .note(statement.choices[j].span, "first here")
          .remedy(fmt::format("a label tells them apart: `other = {}`", excerpt(session, statement.choices[k].equation.span)));
      break;
    }
  }
}

}  // namespace

void elaborate_equation(Session& session, const Scope& scope, const ast::Equation& statement, Instance& instance) {
  instance.compares = statement.each;
  for (const ast::EquationChoice& choice : statement.choices) {
    EquationI equation = read_equation(session, scope, choice.equation);
    if (statement.each) equation.label = choice.label ? choice.label->text : choice.equation.steps.front().name.text;
    instance.equations.push_back(std::move(equation));
  }
  check_labels(session, statement, instance);
}

void elaborate_levels(Session& session, const Scope& scope, const ast::Levels& levels, Instance& instance) {
  instance.levels_auto = !levels.count;
  if (!levels.count) return;
  const auto count = evaluate_count(session, scope, *levels.count);
  if (!count) return;
  if (*count < 1) {
    session.report(span_of(session, scope, *levels.count), diag::count_too_small, "the number of levels", 1);
    return;
  }
  const double all = std::exp2(static_cast<double>(instance.qubits.size()));
  instance.levels = static_cast<std::uint32_t>(std::min({static_cast<double>(*count), all, 4294967295.0}));
}

void elaborate_trajectories(Session& session, const Scope& scope, const ast::Draws& draws, Instance& instance) {
  const auto count = evaluate_count(session, scope, draws.count);
  const auto seed = draws.seed ? evaluate_count(session, scope, *draws.seed) : std::optional<std::int64_t>(0);
  if (!count || !seed) return;
  if (*count < 2) {
    session.report(span_of(session, scope, draws.count), diag::count_too_small, "the number of trajectories", 2);
  } else if (*count > kMostTrajectories) {
    session.report(span_of(session, scope, draws.count), diag::out_of_range, "trajectories", fmt::to_string(*count), "2",
                   fmt::to_string(kMostTrajectories));
  } else if (*seed < 0) {
    session.report(span_of(session, scope, *draws.seed), diag::below_zero, "a seed", fmt::to_string(*seed));
  } else {
    instance.trajectories = TrajectoriesI{static_cast<std::uint32_t>(*count), static_cast<std::uint64_t>(*seed)};
  }
}

}  // namespace tarn
